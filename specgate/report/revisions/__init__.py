"""Two revisions side by side, in words and pictures; never computes."""
