"""What became of a board's pairs since an earlier result of it."""
