"""The factor by which one period of one minus a cosine differs from a step up and a step down.

With w = 2 pi / period, size (1 - cos w t) over one period has the transform

    size (1 - e^(-period s)) / s * G(s),   G = w^2 / (s^2 + w^2) = 1 / (1 + (s/w)^2).

The quotient of quasi-polynomials before G is that of a pulse, with rational coefficients; G is kept in balls. The whole
is entire: the poles of G at +-jw are zeros of 1 - e^(-period s). So

- the response has the poles of its channel alone, and its residues there are those of the pulse times G. No root of
  D (retarded) or of d0 is at +-jw: delays and period being rational, every e^(-delay jw) is a root of unity, so that jw
  would be a root of a polynomial with algebraic coefficients, the leading one that of d0; but pi is transcendental;
- in the method of steps the terms that begin before the end of the input have a pole at jw, of residue -jw/2 times that
  of the other factors there, which is gone once all terms have begun;
- G = 1 + O(s^2), so that principal parts at s = 0 up to s^-2 are those of the pulse, exactly;
- on a line Re s = -g, Im s >= 0, |s - jw| >= g and |s + jw| >= w: |G| <= w/g.
"""

from __future__ import annotations

from flint import acb, acb_series, arb, fmpq


def shaped(series: acb_series, point: acb, period: fmpq | None) -> acb_series:
    """Return a power series at a point times G, in the series length that is set; unchanged without a period."""
    if period is None:
        return series
    inverse = arb(period) / (2 * arb.pi())
    turn = acb_series([point * inverse, inverse])
    return series / (1 + turn * turn)


def pole_of(period: fmpq) -> tuple[acb, acb]:
    """Return jw and the residue of G there."""
    rate = 2 * arb.pi() / arb(period)
    return acb(0, rate), acb(0, -rate / 2)


def bound_on(real: fmpq, period: fmpq | None) -> arb:
    """Return what |G| does not exceed on a line left of the axis; one without a period."""
    if period is None:
        return arb(1)
    return (2 * arb.pi() / (arb(period) * -real)).abs_upper()
