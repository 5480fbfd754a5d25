"""Decay, damping and natural frequency of the roots of a polynomial against a rational limit: exact signs.

A ball never decides that a damping ratio *is* 1/2. Here the number of roots exactly on the limiting line, ray or circle
is counted in rational arithmetic first; balls are then refined until all the others are clear of it.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Literal

from flint import acb, arb, fmpq, fmpq_poly

from specgate.systems.polynomials import ONE, order_at_origin
from specgate.systems.roots import certified_roots
from specgate.systems.stability import classify, count_positive_roots
from specgate.terms.precision import HIGHEST, working_precision

Sign = Literal[-1, 0, 1]


def compare_decay_rate(p: fmpq_poly, limit: fmpq) -> Sign:
    """Return the sign of min(-Re r) - limit over all roots r (1/s). Raises ValueError if `p` has no root.

    Roots are moved by the limit and classified about the axis (Routh, Sturm): nothing is computed but whole numbers.
    """
    _require(p.degree() > 0)
    count = classify(p(fmpq_poly([-limit, 1])))
    return -1 if count.right else 0 if count.axis else 1


def compare_damping_ratio(p: fmpq_poly, limit: fmpq) -> Sign | None:
    """Return the sign of min(-Re r / |r|) - limit over the roots r that are not zero; None if not decided.

    Raises ValueError if there is no such root. On the ray of this damping r = t (-z + j sqrt(1 - z^2)), t > 0: the
    powers of the direction are Chebyshev polynomials of -z (de Moivre), so that real and imaginary part of p(r) are
    polynomials in t with rational coefficients, the latter up to its root factor.
    """
    distinct = each_once(p.right_shift(order_at_origin(p)))
    _require(distinct.degree() > 0)
    if abs(limit) > 1:
        return -1 if limit > 1 else 1
    on_ray = count_positive_roots(_on_ray(distinct, limit))
    return _least_sign(distinct, lambda r: -r.real - limit * abs(r), lambda r: not r.imag < 0, on_ray)


def compare_natural_frequency(p: fmpq_poly, limit: fmpq) -> Sign | None:
    """Return the sign of min |r| - limit over the roots r that are not real (rad/s); None if not decided.

    Raises ValueError if every root is real. The circle |r| = limit becomes the imaginary axis of x in
    r = limit (1 + x)/(1 - x); its real points become zero and infinity and do not count.
    """
    distinct = each_once(p)
    _require(any(not root.value.imag.is_zero() for root in certified_roots(distinct, 64)))
    if limit <= 0:
        return 1
    count = classify(circle_to_axis(distinct, limit))
    on_circle = (count.axis - count.origin) // 2
    return _least_sign(distinct, lambda r: abs(r) - limit, lambda r: r.imag > 0, on_circle)


def _require(has_roots: bool) -> None:
    if not has_roots:
        raise ValueError("there is no root to compare")


def each_once(p: fmpq_poly) -> fmpq_poly:
    """Return the polynomial with each root of `p` once."""
    return p // p.gcd(p.derivative()) if p.degree() > 0 else p


def _on_ray(p: fmpq_poly, damping: fmpq) -> fmpq_poly:
    """Return a polynomial in t whose positive roots are the distances of the roots of `p` on the ray of a damping."""
    cosine = -damping
    if abs(cosine) == 1:
        return p(fmpq_poly([0, cosine]))
    # first[k] = cos(k phi) and second[k] = sin(k phi)/sin(phi), both by x[k+1] = 2 cos(phi) x[k] - x[k-1].
    first, second = [fmpq(1), cosine], [fmpq(0), fmpq(1)]
    for _ in range(p.degree()):
        first.append(2 * cosine * first[-1] - first[-2])
        second.append(2 * cosine * second[-1] - second[-2])
    real = fmpq_poly([c * x for c, x in zip(p.coeffs(), first, strict=False)])
    imaginary = fmpq_poly([c * x for c, x in zip(p.coeffs(), second, strict=False)])
    return real.gcd(imaginary)


def circle_to_axis(p: fmpq_poly, radius: fmpq) -> fmpq_poly:
    """Return (1 - x)^n p(radius (1 + x)/(1 - x))."""
    above, below = fmpq_poly([radius, radius]), fmpq_poly([1, -1])
    result, power = fmpq_poly(), ONE
    for coefficient in reversed(p.coeffs()):
        result, power = result * above + power * coefficient, power * below
    return result


def _least_sign(
    p: fmpq_poly, distance: Callable[[acb], arb], counts: Callable[[acb], bool], on_limit: int
) -> Sign | None:
    """Return the least sign of a distance over the roots of `p` that count; exactly `on_limit` of them have none."""
    bits = 64
    while bits <= HIGHEST:
        roots = [root.value for root in certified_roots(p, bits) if counts(root.value)]
        with working_precision(bits):
            distances = [distance(root) for root in roots]
        if sum(d.contains(0) for d in distances) == on_limit:
            return -1 if any(d < 0 for d in distances) else 0 if on_limit else 1
        bits *= 2
    return None
