"""Enclosed: margins, crossings and gains over frequency, from exact polynomials."""
