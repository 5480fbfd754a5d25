"""What is said of every proof about a sampled loop."""

from __future__ import annotations

GROUND = "a loop in z whose coefficients are rational, or enclosed in balls where blocks in s have modes"
