"""Enclosed layer: what a response does over time, with proved bounds."""
