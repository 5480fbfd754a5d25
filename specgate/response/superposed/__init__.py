"""Sums of delayed modal responses as pieces: what inputs other than a single step give."""

from specgate.response.superposed.pieces import Superposed

__all__ = ["Superposed"]
