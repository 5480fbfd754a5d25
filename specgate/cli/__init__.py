"""One file per command; the only place that reads clock, environment and terminal."""
