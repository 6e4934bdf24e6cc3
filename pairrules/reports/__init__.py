"""Reports: one a file, `Result` to text."""
