"""The phase of L(z) at a frequency, followed continuously from zero frequency.

Near z = 1 L is K/(j omega T)^k, K real: the phase begins at -k pi/2, and a negative K begins half a turn lower. From
there the angle changes by a whole turn against its principal value wherever L passes the negative real axis: it falls
by one where the imaginary part turns from minus to plus, and rises by one where it turns from plus to minus. Passages
are the roots of the imaginary part; a pole or zero on the circle other than at z = 1 and z = -1 would be passed with a
jump and leaves the phase open.
"""

from __future__ import annotations

from flint import arb, arb_poly, fmpq, fmpq_poly

from specgate.frequency.spots import Sign
from specgate.response.answers import Answer
from specgate.sampled.circle import in_w
from specgate.sampled.enclosed_axis import Axis, Balls, Crossed, Untold
from specgate.sampled.scale import BEYOND, SampledScale, Tangent
from specgate.sampled.transfer import PulseTransfer
from specgate.systems.error_constants import loop_type, sign_at_origin
from specgate.systems.polynomials import order_at_origin
from specgate.systems.stability import classify
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.verdicts import Proof

_ON_CIRCLE = "a pole or zero on the unit circle lies in between: the phase jumps there"


def phase_at(
    axis: Axis, transfer: PulseTransfer, slow: TransferFunction, scale: SampledScale, frequency: fmpq
) -> Answer:
    """Return arg L at a frequency (rad)."""
    if transfer.zero:
        return Answer.nothing("the gain is zero: there is no phase")
    if scale.beyond(frequency):
        return Answer.nothing(BEYOND)
    if any(_on_circle(p) for p in (transfer.numerator, transfer.denominator)):
        return Answer.undecided(_ON_CIRCLE)
    start = -loop_type(slow) - (2 if sign_at_origin(slow) < 0 else 0)
    if frequency == 0:
        return _quarters(start)
    place = Tangent(frequency * scale.period / 2)
    try:
        passed = [one for one in axis.roots("imaginary", imaginary) if _below(one, place)]
        turns = sum(_turn(axis, passed, place), 0)
        first = _sign_after(axis, None, passed[0] if passed else place)
    except Untold as untold:
        return Answer.undecided(str(untold))
    return _followed(axis, place, turns + _first_turn(start, first))


def _on_circle(p: fmpq_poly) -> bool:
    """Whether an exact factor has a root on the circle other than z = 1 and z = -1."""
    moved = in_w(p)
    moved = moved.right_shift(order_at_origin(moved))
    return moved.degree() > 0 and classify(moved).axis > 0


def _quarters(count: int) -> Answer:
    def refine(bits: int) -> arb:
        with working_precision(bits + 8):
            return arb.pi() * count / 2

    return Answer.of_exact(0) if count == 0 else Answer(Proof.ENCLOSED, refine=refine)


def _below(one: Crossed, place: Tangent) -> bool:
    """Whether a root lies below a place. Raises Untold."""
    bits = 64
    while bits <= 1024:
        first, second = one.enclose(bits), place.enclose(bits)
        if first < second or first > second:
            return bool(first < second)
        bits *= 2
    raise Untold("the frequency is too close to one at which L is real")


def _sign_after(axis: Axis, before: Crossed | None, after: Crossed | Tangent) -> Sign:
    """Return the sign of the imaginary part between two neighbouring roots, or from zero frequency to the first."""
    low = arb(0) if before is None else before.enclose(64).upper()
    high = after.enclose(64).lower()
    with working_precision(128):
        middle = _Place(arb((low.mid().fmpq() + high.mid().fmpq()) / 2))
    return axis.sign(middle, imaginary)


class _Place:
    def __init__(self, x: arb) -> None:
        self._x = x

    def enclose(self, bits: int) -> arb:
        return self._x


def _turn(axis: Axis, passed: list[Crossed], place: Tangent) -> list[int]:
    """Return the whole turns that the passages of the negative real axis add."""
    found = []
    for number, one in enumerate(passed):
        if axis.sign(one, real) < 0:
            before = _sign_after(axis, passed[number - 1] if number else None, one)
            after = _sign_after(axis, one, passed[number + 1] if number + 1 < len(passed) else place)
            found.append((before - after) // 2)
    return found


def _first_turn(quarters: int, first: Sign) -> int:
    """Return the whole turns between the phase at zero frequency and the principal value just above it.

    On the negative real axis the sign of the imaginary part tells on which side of the cut the principal value is.
    """
    inside = (quarters + 1) % 4 - 1
    if inside == 2 and first < 0:
        inside = -2
    return (quarters - inside) // 4


def _followed(axis: Axis, place: Tangent, turns: int) -> Answer:
    def refine(bits: int) -> arb:
        precision = bits + 32
        while True:
            x, balls = place.enclose(precision), axis.at(2 * precision)
            with working_precision(precision):
                angle = arb.atan2(balls.imaginary(x) * x.sqrt(), balls.real(x)) + 2 * arb.pi() * turns
            if angle.rel_accuracy_bits() >= bits or precision > HIGHEST:
                return angle
            precision *= 2

    return Answer(Proof.ENCLOSED, refine=refine)


def imaginary(balls: Balls) -> arb_poly:
    """Return Im(N conj D)/v."""
    return balls.imaginary


def real(balls: Balls) -> arb_poly:
    """Return Re(N conj D)."""
    return balls.real
