"""Loops with dead time, never replaced by a rational approximant."""
