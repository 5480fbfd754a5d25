"""The phase of a quotient of quasi-polynomials at a frequency, followed continuously from zero frequency.

With f(s) = c s^q (1 + …) the argument of f(j w) begins at arg c + q pi/2. Up to some w0 it differs from that by the
argument of f(s)/(c s^q), which is an average of f^(q)/(c q!) over the way from 0 (Taylor's formula with the integral as
remainder): a ball of the latter right of the imaginary axis holds it. From w0 on it grows cell by cell, as where roots
are counted (`quasi_count`); a root on the axis leaves no phase. A dead time that is a factor of f turns it by -delay w.
"""

from __future__ import annotations

from flint import acb, arb, fmpq

from specgate.delays.laurent import of_quasi
from specgate.delays.recording import AXIS, TURN
from specgate.response.accounts import Account
from specgate.response.answers import Answer
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_count import Evaluated, walk
from specgate.terms.precision import HIGHEST, series_terms, working_precision

_UNDECIDED = "a pole or zero lies on the imaginary axis up to this frequency, or very near to it"


def late_phase(transfer: DelayedTransfer, frequency: fmpq) -> Answer:
    """Return arg (numerator/denominator)(j frequency) (rad); frequency not negative."""
    if not transfer.numerator:
        return Answer.nothing("the gain is zero: there is no phase")
    if frequency == 0 and transfer.order_at_origin != 0:
        return Answer.nothing("a pole or zero lies on the imaginary axis at this frequency")
    if _turned(transfer.numerator, frequency, 64) is None or _turned(transfer.denominator, frequency, 64) is None:
        return Answer.undecided(_UNDECIDED)
    quarters = transfer.order_at_origin - (2 if transfer.value_at_origin < 0 else 0)

    def refine(bits: int) -> arb:
        precision = bits + 32
        above, below = (_turned(part, frequency, precision) for part in (transfer.numerator, transfer.denominator))
        assert above is not None
        assert below is not None
        with working_precision(precision):
            return arb.pi() * quarters / 2 + above - below

    return Answer.of_ball(refine).accounted(lambda: Account(TURN, AXIS))


def _turned(quasi: Quasi, frequency: fmpq, bits: int) -> arb | None:
    """Return how far f(j w)/(c s^q) turns from w = 0 on; None where it comes too near to zero to tell."""
    if len(quasi.terms) == 1 and quasi.terms[0][0] != 0:
        ((delay, polynomial),) = quasi.terms
        turned = _turned(Quasi.rational(polynomial), frequency, bits)
        with working_precision(bits):
            return None if turned is None else turned - arb(delay * frequency)
    if frequency == 0 or (quasi.degree == 0 and quasi.is_rational):
        return arb(0)
    order, lead = quasi.first_at_origin()
    start = _calm(quasi, order, lead, frequency)
    if start is None:
        return None
    with working_precision(bits):
        function = Evaluated(quasi)
        total = (function.value(acb(0, start)) / (acb(0, start) ** order * lead)).arg()
        reached = start
        for cell, change in walk(function, fmpq(0), start, frequency, min(bits, HIGHEST)):
            total += change
            reached = cell.end
    return total if reached == frequency else None


def _calm(quasi: Quasi, order: int, lead: fmpq, frequency: fmpq) -> fmpq | None:
    """Return a frequency up to which f/(c s^q) stays right of the imaginary axis."""
    reach = frequency
    with series_terms(order + 1), working_precision(64):
        for _ in range(200):
            part = of_quasi(quasi, acb(0, arb(0).union(arb(reach))))[order] / lead
            if part.real > 0:
                return reach
            reach = reach / 2
    return None
