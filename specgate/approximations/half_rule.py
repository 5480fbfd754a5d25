"""A row of lags as one lag and a dead time, by the half rule: made for tuning, not for times.

Of time constants T1 >= T2 >= T3 ... the lag is T1 + T2/2 and the dead time T2/2 + T3 + ... . A controller tuned for
that model suits the plant well, but the response of the model is not the plant's: four equal lags take half as long
again to rise as it says, because it puts into the dead time what rounds the course. Its times are shown beside the
proved ones; as the basis of a claim on a time the rule is always out of range.
"""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.approximation import Approximation, Condition, Found
from specgate.approximations.conditions import NO_ZEROS, SETTLES, relative_band, words
from specgate.approximations.features import Features
from specgate.approximations.figures import SHOWN, combined, quotient, total
from specgate.approximations.real_tail import REAL_POLES
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_SKOGESTAD = (
    "S. Skogestad, Simple analytic rules for model reduction and PID controller tuning, J. Process Control, 2003"
)
_HALF, _NO_TIME = Answer.of_exact(fmpq(1, 2)), Answer.of_exact(0)


def lag_and_dead_time(features: Features) -> tuple[Answer, Answer] | None:
    """Return lag and dead time of the reduced model, s; None where the poles are not real and decaying."""
    if not features.stable or not features.poles or any(pole.oscillates for pole in features.poles):
        return None
    slowest_first = sorted(features.poles, key=lambda pole: pole.decay.enclose(SHOWN).mid().fmpq())
    constants = [quotient(Answer.of_exact(1), pole.decay) for pole in slowest_first]
    half = combined(lambda x, y: x * y, constants[1], _HALF) if len(constants) > 1 else _NO_TIME
    return total([constants[0], half]), total([half, *constants[2:]])


def _time(features: Features, arguments: Arguments) -> Answer:
    model, band = lag_and_dead_time(features), relative_band(arguments)
    if model is None:
        return Answer.nothing("the rule is for real poles that decay")
    if arguments.measure == "rise_time":
        rest, left = 1 - arguments.lower, 1 - arguments.upper
        return Answer.nothing("a lag never reaches 100 %") if left == 0 else _after(rest / left, model[0], _NO_TIME)
    if arguments.measure == "delay_time":
        return _after(fmpq(2), *model)
    if band is None or not 0 < band < 1:
        return Answer.nothing("the formula has numbers for bands in per cent of the change only")
    return _after(1 / band, *model)


def _after(ratio: fmpq, lag: Answer, dead_time: Answer) -> Answer:
    return combined(lambda constant, late: late + constant * arb(ratio).log(), lag, dead_time)


def _purpose(_: Features, arguments: Arguments, __: fmpq | None) -> Found:
    return words(f"a {(arguments.measure or 'time').replace('_', ' ')} is asked for", False)


ROW = Approximation(
    name="half_rule",
    title="A row of lags as one lag and a dead time",
    estimates=("settling_time", "rise_time", "delay_time"),
    formula="lag T1 + T2/2, dead time T2/2 + T3 + ...",
    source=_SKOGESTAD,
    conditions=(
        SETTLES,
        REAL_POLES,
        NO_ZEROS,
        Condition(
            key="purpose",
            name="what the rule is used for",
            source=_SKOGESTAD,
            required="the tuning of a controller",
            find=_purpose,
        ),
    ),
    evaluate=_time,
    accuracy=lambda _, __: None,
    text=__doc__,
    alternatives=("real_poles_settling",),
)
