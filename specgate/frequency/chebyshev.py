"""Chebyshev polynomials of the first kind in a field of algebraic numbers."""

from __future__ import annotations

from flint import fmpq_poly


def chebyshev_modulo(count: int, cosine: fmpq_poly, modulus: fmpq_poly) -> fmpq_poly:
    """Return T_count(cosine) modulo a polynomial, by T_2n = 2 T_n^2 - 1 and T_2n+1 = 2 T_n T_n+1 - c."""
    low, high = fmpq_poly([1]), cosine % modulus
    for bit in bin(count)[2:]:
        mixed = (2 * low * high - cosine) % modulus
        if bit == "1":
            low, high = mixed, (2 * high * high - 1) % modulus
        else:
            low, high = (2 * low * low - 1) % modulus, mixed
    return low
