"""One file per approximation: formula, range, stated accuracy, source."""
