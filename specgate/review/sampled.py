"""What a Review says of a sampled loop: its modes and its open loops are in z."""

from __future__ import annotations

from collections.abc import Callable

from flint import arb, arb_poly

from specgate.review.printing import fraction
from specgate.review.types import Enclosure, InZ
from specgate.sampled.opened import SampledOpening
from specgate.sampled.solution import SampledSolution
from specgate.sampled.transfer import PulseTransfer
from specgate.systems.roots import Root
from specgate.systems.transfer import TransferFunction
from specgate.terms.enclosed import printed
from specgate.terms.precision import working_precision

_SHOWN = 128


def loop_in_z(solution: SampledSolution) -> InZ:
    """Print the period, and the characteristic polynomial where it is not rational."""
    enclosed = None if solution.exact is not None else _enclosed(solution.polynomial)
    return InZ(fraction(solution.period), characteristic_polynomial=enclosed)


def opening_in_z(opening: SampledOpening) -> InZ:
    """Print L(z) where it is not rational."""
    transfer = opening.transfer
    if transfer is None or transfer.rest is None:
        return InZ(fraction(opening.period))
    above, below = (_part(transfer, number) for number in (0, 1))
    return InZ(fraction(opening.period), numerator=_enclosed(above), denominator=_enclosed(below))


def exact_opening(opening: SampledOpening | None) -> TransferFunction | None:
    """Return L(z) where it is rational."""
    transfer = None if opening is None else opening.transfer
    if transfer is None or transfer.rest is not None:
        return None
    return TransferFunction(transfer.numerator, transfer.denominator)


def roots(solution: SampledSolution) -> tuple[Root, ...]:
    """Return the modes in z, in order; none where they are not told apart."""
    found = solution.roots(_SHOWN) or ()
    return tuple(sorted(found, key=lambda root: (root.value.real.mid().fmpq(), root.value.imag.mid().fmpq())))


def _part(transfer: PulseTransfer, number: int) -> Callable[[int], arb_poly]:
    return lambda bits: transfer.in_z(bits)[number]


def _enclosed(polynomial: Callable[[int], arb_poly]) -> tuple[Enclosure, ...]:
    """Print enclosed coefficients, highest power first."""
    count = len(polynomial(_SHOWN).coeffs())
    return tuple(_coefficient(polynomial, place) for place in reversed(range(count)))


def _coefficient(polynomial: Callable[[int], arb_poly], place: int) -> Enclosure:
    def refine(bits: int) -> arb:
        found = polynomial(bits)
        with working_precision(bits):
            return found[place]

    first = refine(_SHOWN)
    if first.is_exact() and first.is_integer():
        return Enclosure(float(first), None, None)
    form = printed(refine)
    return Enclosure(form.value, form.lower, form.upper)
