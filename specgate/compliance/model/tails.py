"""Slow tails that a response hides, or that a pole and a zero beside it leave.

With F the response without a pole at -p and a zero at -z beside it, F(0) = 1, what the two leave is a mode of the
amplitude |1 - p/z| |F(-p)| in parts of the change. Where they cancel exactly the mode is hidden: once they are the part
e of the pole apart it has e |F(-p)|, so that it fills a band b at e = b/|F(-p)|, to first order. Where they do not, the
greatest distance between the response with and without the couple is proved and compared with the band.
"""

from __future__ import annotations

from flint import arb, fmpq, fmpq_poly

from specgate.analysis.analyses import LoopAnalysis
from specgate.approximations.cancellation import Cancellation, Couple, cancellation
from specgate.approximations.features import Features
from specgate.approximations.figures import SHOWN
from specgate.approximations.spots import Spot, spots
from specgate.compliance.compare import sign
from specgate.compliance.model.fact import PER_SECOND, PERCENT, SECOND, Figured, ModelAssumption
from specgate.compliance.readings import Reading
from specgate.compliance.wording import apart, figure
from specgate.measures.measure import Arguments, Band
from specgate.project.types import Subject
from specgate.response.answers import Answer
from specgate.systems.solution import Channel
from specgate.systems.transfer import TransferFunction
from specgate.terms.places import Place
from specgate.terms.precision import working_precision
from specgate.terms.unit import Unit
from specgate.terms.verdicts import Standing, Trilean

NEAR = fmpq(1, 5)
"""Part of the zero by which a pole may lie off it and still look as if it were cancelled."""
OF_TAILS = (
    "settling_time",
    "deviation_after",
    "value_at",
    "within_mask",
    "integral_absolute_error",
    "integral_squared_error",
)
"""Measures that a slow tail of small amplitude rules."""


# --- hidden altogether ------------------------------------------------------------------------------------------


def hidden_slow_mode(loop: LoopAnalysis, about: Subject, arguments: Arguments) -> ModelAssumption | None:
    """Say of a response that it hides a mode slower than any that it shows; None where it does not."""
    if about.kind != "response" or about.name is None or arguments.measure not in OF_TAILS:
        return None
    for channel in loop.responses[about.name].channels:
        if isinstance(channel, Channel) and channel.hidden.degree() > 0 and channel.stable:
            found = _slow_mode(channel, arguments.band)
            if found is not None:
                place = loop.loop.responses[about.name].place
                on = f"{about.loop}.{about.name}"
                return ModelAssumption(
                    "hidden_slow_mode", on, None, Trilean.UNKNOWN, Standing.SOUND, found[0], place, found[1]
                )
    return None


def _slow_mode(channel: Channel, band: Band | None) -> tuple[str, tuple[Figured, ...]] | None:
    """Return what there is to say of the slowest hidden mode; None where the response shows a slower one."""
    reduced = channel.transfer.reduced()
    hidden, shown = _slowest(channel.hidden), _slowest(reduced.denominator)
    if hidden is None or (shown is not None and not hidden.decay.enclose(SHOWN) < shown.decay.enclose(SHOWN)):
        return None
    both = [hidden.decay] if shown is None else [hidden.decay, shown.decay]
    said = apart([Reading.once(one).in_unit(PER_SECOND) for one in both], PER_SECOND)
    words = f"a mode that decays at {said[0]} is cancelled by a zero and does not show"
    figures = [Figured("decay rate of the hidden mode", Reading.once(hidden.decay), PER_SECOND)]
    if shown is not None:
        words += f", and the slowest that shows decays at {said[-1]}"
        figures.append(Figured("decay rate of the slowest mode shown", Reading.once(shown.decay), PER_SECOND))
    shift = _filling(reduced, hidden, band)
    if shift is not None:
        words += f": once pole and zero come {_said(shift, PERCENT)} apart its tail fills the band, to first order"
        figures.append(Figured("distance of pole and zero that fills the band", Reading.once(shift), PERCENT))
    return words, tuple(figures)


def _slowest(modes: fmpq_poly) -> Spot | None:
    """Return the root that decays most slowly; the first of several that cannot be told apart."""
    found = spots(modes) if modes.degree() > 0 else ()
    rates = [one.decay.enclose(SHOWN) for one in found]
    return next((one for one, own in zip(found, rates, strict=True) if not any(other < own for other in rates)), None)


def _filling(reduced: TransferFunction, hidden: Spot, band: Band | None) -> Answer | None:
    """Return how far, in parts of it, a real hidden pole is off when its tail fills a band; None of other modes."""
    steady = reduced.numerator[0]
    if hidden.oscillates or band is None or not band.relative or steady == 0:
        return None
    width, gain = band.size, steady / reduced.denominator[0]

    def refine(bits: int) -> arb:
        place = -hidden.decay.enclose(bits)
        with working_precision(bits):
            whole = _at(reduced.numerator, place) / _at(reduced.denominator, place) / arb(gain)
            return arb(width) / abs(whole)

    return None if not refine(SHOWN).is_finite() else Answer.of_ball(refine)


def _at(p: fmpq_poly, place: arb) -> arb:
    total = arb(0)
    for coefficient in reversed(p.coeffs()):
        total = total * place + arb(coefficient)
    return total


# --- nearly cancelled --------------------------------------------------------------------------------------------


def near_cancellation(
    loop: LoopAnalysis, about: Subject, arguments: Arguments, reading: Reading
) -> ModelAssumption | None:
    """Say of a pole and a zero beside each other that their tail rules the settling time; None where it does not."""
    band, settled = arguments.band, reading.settled
    if about.kind != "response" or about.name is None or arguments.measure != "settling_time" or band is None:
        return None
    response = loop.responses[about.name]
    features = response.features
    if features is None or features.subject.beyond is not None or settled.absent is not None or not _looks_so(features):
        return None
    found = features.once(cancellation)
    if found is None or found.tail.absent is not None or not _apart(found.couple) <= arb(NEAR):
        return None
    width = found.width(band)
    rest = found.unit.settling(width)
    if sign(found.tail, width) != 1 or (rest.absent is None and not rest.enclose(SHOWN) < settled.enclose(SHOWN)):
        return None
    return _ruling(found, (width, rest), settled, f"{about.loop}.{about.name}", response.response.place)


def _ruling(
    found: Cancellation, without: tuple[fmpq, Answer], settled: Answer, on: str, place: Place
) -> ModelAssumption:
    """Say what the couple leaves. without: the width of the band, and the settling time without the couple."""
    width, rest = without
    tail, edge = apart([Reading.once(one).in_unit(PERCENT) for one in (found.tail, Answer.of_exact(width))], PERCENT)
    distance = Answer.of_ball(lambda bits: _apart(found.couple, bits))
    words = (
        f"{found.couple.words}: these do not cancel; they are {_said(distance, PERCENT)} apart and leave a tail "
        f"of {tail} of the change, where the band is {edge}; it settles in {_said(settled, SECOND)}"
    )
    figures = [
        Figured("distance of pole and zero", Reading.once(distance), PERCENT),
        Figured("greatest value of the tail", Reading.once(found.tail), PERCENT),
        Figured("settling time", Reading.once(settled), SECOND),
    ]
    if rest.absent is None:
        words += f", without the two in {_said(rest, SECOND)}"
        figures.append(Figured("settling time without the two", Reading.once(rest), SECOND))
    return ModelAssumption("near_cancellation", on, None, Trilean.NO, Standing.SOUND, words, place, tuple(figures))


def _looks_so(features: Features) -> bool:
    """Whether any pole lies near a zero: cheap, before the tail is searched."""
    if not features.stable or not features.steady_gain:
        return False
    zeros = [zero.at(SHOWN) for zero in features.zeros]
    with working_precision(SHOWN):
        near = [abs(1 - pole.at(SHOWN) / zero) for pole in features.poles for zero in zeros if not zero.contains(0)]
        return any(not one > arb(NEAR) for one in near)


def _apart(couple: Couple, bits: int = SHOWN) -> arb:
    pole, zero = couple.pole.at(bits), couple.zero.at(bits)
    with working_precision(bits):
        return abs(1 - pole / zero)


def _said(answer: Answer, unit: Unit) -> str:
    return figure(Reading.once(answer).in_unit(unit), unit)
