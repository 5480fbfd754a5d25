"""Resonance peak of a complex pair from its damping ratio: 1/(2 zeta sqrt(1 - zeta^2)), or 1/(2 zeta) for short.

Exact for a pair and nothing else, below a damping ratio of 1/sqrt(2); from there on the gain has no peak above that at
zero frequency, and the formula gives one all the same. The short form leaves out the root and is always too low (the
promise is then unsafe): by 2 % at zeta = 0.2, by 13 % at 0.5.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Condition, Found, Variant
from specgate.approximations.conditions import ALONE, at_most, damping_between, words
from specgate.approximations.features import Features
from specgate.approximations.figures import SHOWN, combined
from specgate.approximations.variants import offered
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.terms.verdicts import Trilean

_NO_PAIR = "there is no complex pair of poles"
_SHORT_TO = fmpq(1, 2)


def _peak(features: Features, _: Arguments) -> Answer:
    damping = features.damping
    if damping is None or not features.stable:
        return Answer.nothing(_NO_PAIR if damping is None else "the response does not settle")
    return combined(lambda zeta: 1 / (2 * zeta * (1 - zeta * zeta).sqrt()), damping)


def _short(features: Features, _: Arguments) -> Answer:
    damping = features.damping
    if damping is None or not features.stable:
        return Answer.nothing(_NO_PAIR if damping is None else "the response does not settle")
    if damping.exact is not None:
        return Answer.of_exact(1 / (2 * damping.exact))
    return combined(lambda zeta: 1 / (2 * zeta), damping)


def _peaks(features: Features, _: Arguments, __: fmpq | None) -> Found:
    """Find whether twice the square of the damping ratio is below 1: exactly so where that is rational."""
    pair, damping = features.pair, features.damping
    if pair is None or damping is None:
        return words(_NO_PAIR, False)
    shown = damping.enclose(SHOWN)
    if pair.real is not None and pair.square is not None:
        return Found(shown, Trilean.of(2 * pair.real * pair.real < pair.square))
    return Found(shown, at_most(combined(lambda zeta: 2 * zeta * zeta, damping), fmpq(1)).holds)


_PEAKS = Condition(
    key="peak", name="damping ratio of the pair", source="derived", required="below 1/sqrt(2) = 0.7071", find=_peaks
)

_EXACT = Accuracy(fmpq(0), fmpq(0), "exact (the pair alone)")
_TOO_LOW = Accuracy(fmpq(-134, 1000), fmpq(0), "-13.4 to 0 % (damping ratios up to 0.5)")

VARIANTS = (
    Variant(
        name="exact",
        for_="damping ratios below 0.7071",
        formula="1/(2 zeta sqrt(1 - zeta^2))",
        source="exact for the pair",
        conditions=(ALONE, _PEAKS),
        evaluate=_peak,
        accuracy=lambda _, __: _EXACT,
    ),
    Variant(
        name="short",
        for_="light damping",
        formula="1/(2 zeta)",
        source="common practice",
        conditions=(ALONE, damping_between(fmpq(0), _SHORT_TO, "derived")),
        evaluate=_short,
        accuracy=lambda _, __: _TOO_LOW,
    ),
)

ROW = offered(
    VARIANTS,
    name="resonance_from_damping",
    title="Resonance peak from the damping ratio of a pair",
    estimates=("resonance_peak",),
    text=__doc__,
    premises=("dominant_pair",),
)
