"""Rise time from 10 % to 90 % as 2.2 over the bandwidth in rad/s, or 0.35 over the bandwidth in Hz.

Exact for a single lag but for rounding and for 3 dB in place of half power: 2.1972 and 0.9976. Real poles without
zeros, however many, stay within +0.3 to +3.1 % (a long row of equal lags tends to a rise of 2.134 over the
bandwidth). A pair alone is met to +2.0 to +5.7 % from a damping ratio of 0.5 on; below, its bandwidth is held up by
the resonance: +14.6 % at 0.3. The rule errs on the long side in all of these, but a zero, or a pair beside other
poles, can put it on either: three poles of a Butterworth filter rise 4 % slower than it says.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import NO_ZEROS, SETTLES, at_least, counted_between, words
from specgate.approximations.features import Features
from specgate.approximations.figures import quotient
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer


def _rise(features: Features, _: Arguments) -> Answer:
    gain = features.subject.gain
    if gain is None:
        return Answer.undecided("the response over frequency is not answered by this version")
    bandwidth = gain.bandwidth()
    return bandwidth if bandwidth.absent is not None else quotient(Answer.of_exact(fmpq(11, 5)), bandwidth)


def _poles(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    damping = features.damping
    if damping is None:
        return words("all real", True)
    if not features.alone or threshold is None:
        return words("a complex pair beside others", False)
    return at_least(damping, threshold)


def _accuracy(features: Features, _: Arguments) -> Accuracy:
    if features.pair is None:
        return Accuracy(fmpq(3, 1000), fmpq(31, 1000), "+0.3 to +3.1 % (real poles)")
    return Accuracy(fmpq(20, 1000), fmpq(57, 1000), "+2 to +5.7 % (a pair alone)")


ROW = Approximation(
    name="rise_from_bandwidth",
    title="Rise time from the bandwidth",
    estimates=("rise_time",),
    formula="2.2/wb = 0.35/fb",
    source="common practice",
    conditions=(
        SETTLES,
        NO_ZEROS,
        Condition(
            key="poles",
            name="poles are all real, or a pair alone with a damping ratio of at least {threshold}",
            source="common practice for a single pole; that more will do: derived",
            required="all real, or >= {threshold}",
            find=_poles,
            threshold=fmpq(1, 2),
        ),
        counted_between(fmpq(1, 10), fmpq(9, 10)),
    ),
    evaluate=_rise,
    accuracy=_accuracy,
    text=__doc__,
    alternatives=("second_order_rise",),
)
