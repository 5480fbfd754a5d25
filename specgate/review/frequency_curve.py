"""Points of an opened loop over frequency for drawing: evaluated in balls, printed in six digits."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from math import ceil, floor, log10

from flint import arb, fmpq, fmpq_poly

from specgate.frequency.questions import OpenLoop
from specgate.measures.subjects import BreakSubject
from specgate.response.answers import Answer
from specgate.review.types import FrequencyCurve
from specgate.sampled.solution import SlowTransfer
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.roots import certified_roots
from specgate.systems.transfer import TransferFunction
from specgate.terms.decimals import exact_decimal
from specgate.terms.enclosed import printed_short
from specgate.terms.precision import working_precision

_BITS = 64
_REGULAR = 144
"""Points at regular distances."""
_DENSE = 24
"""Most of them in a decade."""
_ALL = 200
"""Points in all; the crossings come first."""
_DECADES = 12
"""Decades beyond which a curve is not drawn: they count from the slowest crossing, pole or zero."""
_BESIDE = 0.6
"""Decades that are drawn at least beside the first and the last of them."""
_LIGHT = 0.3
"""Damping below which a pair gets points of its own."""


def frequency_curve(subject: BreakSubject, asked: Iterable[fmpq] = ()) -> FrequencyCurve | None:
    """Return the gain (dB) and the phase (deg, followed from zero frequency) of a loop, all crossings among the points.

    asked: frequencies (rad/s) that requirements name, corners of masks among them, which the curve reaches.
    None where nothing varies, or nothing is known over frequency.
    """
    loop = subject.loop
    if loop is None:
        return None
    crossings = [one.frequency.enclose(_BITS).mid().fmpq() for one in loop.crossings() if _placed(one.frequency)]
    features = [(printed_short(arb(one)), 1.0) for one in crossings] + list(_features(_drawn(subject.open_loop)))
    if not features:
        return None
    features += [(printed_short(arb(one)), 1.0) for one in asked if one > 0]
    points = [_point(loop, frequency) for frequency in _frequencies(crossings, features)]
    shown = [point for point in points if point is not None]
    if len(shown) < 2:
        return None
    frequency, gain, phase = zip(*shown, strict=True)
    return FrequencyCurve(frequency, gain, phase)


def _drawn(opened: TransferFunction | DelayedTransfer | SlowTransfer) -> TransferFunction | DelayedTransfer:
    """Return what tells where to look; of a sampled loop the slow signals do."""
    return opened.slow if isinstance(opened, SlowTransfer) else opened


def _placed(frequency: Answer) -> bool:
    return frequency.absent is None and frequency.exact != 0


def _features(opened: TransferFunction | DelayedTransfer) -> Iterator[tuple[float, float]]:
    """Give distance from the origin and damping of what bends the curves, what lies at the origin left out.

    Poles and zeros; with dead time the roots of each polynomial in the sums, which tell where to look and no more.
    """
    for polynomial in _polynomials(opened):
        for root in certified_roots(polynomial, _BITS) if polynomial.degree() > 0 else ():
            if not (root.value.is_zero() or root.value.imag < 0):
                size = abs(root.value)
                damping = 1.0 if root.value.imag.is_zero() else printed_short(abs(root.value.real) / size)
                yield printed_short(size), damping


def _polynomials(opened: TransferFunction | DelayedTransfer) -> Sequence[fmpq_poly]:
    if isinstance(opened, TransferFunction):
        reduced = opened.reduced()
        return reduced.numerator, reduced.denominator
    return [polynomial for _, polynomial in (*opened.numerator.terms, *opened.denominator.terms)]


def _frequencies(crossings: Sequence[fmpq], features: Sequence[tuple[float, float]]) -> list[fmpq]:
    """Return the frequencies in order: the crossings, regular ones, and those of peaks."""
    first = floor(log10(min(size for size, _ in features)) - _BESIDE)
    last = min(ceil(log10(max(size for size, _ in features)) + _BESIDE), first + _DECADES)
    dense = max(1, min(_DENSE, _REGULAR // (last - first)))
    regular = [_decimal(10.0 ** (k / dense)) for k in range(first * dense, last * dense + 1)]
    room = _ALL - len(regular) - 1
    chosen = [*dict.fromkeys((*crossings, *_peaks(features)))][:room]
    high = fmpq(10) ** last if last >= 0 else 1 / fmpq(10) ** -last
    return sorted(dict.fromkeys((*regular, *(one for one in chosen if one <= high))))


def _peaks(features: Iterable[tuple[float, float]]) -> Iterator[fmpq]:
    """Give the frequencies at which lightly damped pairs bend the curves, the place of each feature first."""
    for share in (0.0, -0.5, 0.5, -1.0, 1.0, -2.0, 2.0):
        for size, damping in features:
            if damping < _LIGHT and size * (1 + share * damping) > 0:
                yield _decimal(size * (1 + share * max(damping, 1e-4)), 6)


def _decimal(value: float, digits: int = 4) -> fmpq:
    """Return a short decimal: the last bits of a float, which differ between processors, are gone."""
    return exact_decimal(f"{value:.{digits - 1}e}")


def _point(loop: OpenLoop, frequency: fmpq) -> tuple[float, float, float] | None:
    """Return frequency, gain and phase; None on an axis pole or zero."""
    gain, phase = loop.gain_at(frequency), loop.phase_at(frequency)
    if gain.absent is not None or phase.absent is not None:
        return None
    size, angle = gain.enclose(_BITS), phase.enclose(_BITS)
    with working_precision(_BITS):
        decibel, degrees = 20 * size.log() / arb(10).log(), angle * 180 / arb.pi()
    if not size > 0 or not decibel.is_finite():
        return None
    return printed_short(arb(frequency)), printed_short(decibel, 1.0), printed_short(degrees, 1.0)
