"""One rule per file: what it looks at and what it says."""
