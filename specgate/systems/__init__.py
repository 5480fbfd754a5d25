"""Exact layer: polynomials, blocks, wiring, stability. No float anywhere."""
