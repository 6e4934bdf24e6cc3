"""Readers: one a format, chosen by content, never by file name."""
