"""The review page: one file that opens from disk, with the board, its flagged pairs, and a decision for each finding.

No `REPORT` stands here: the page needs the drawings, which only `pairrules review` asks for, and jinja2, which only it
loads.
"""
