"""Figures as SVG, written by hand: what a figure shows is a frozen value, `draw` turns it into text."""
