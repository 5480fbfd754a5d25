"""A Project and parameter values to analysed loops."""
