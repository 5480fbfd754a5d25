"""A loop with dead time as the lag it was tuned for: L = e^(-theta s)/((tauc + theta) s), the closed loop a lag tauc.

Tuning by pole cancellation or by the half rule leaves an integrator with the dead time of the plant, and the closed
loop is then taken for a dead time and a lag: settled at theta + tauc ln(1/band), risen in 2.2 tauc. The dead time is in
the loop as well, and makes it quicker than that as long as it is short, and overshoot where it is not. Tuned for a lag
as long as the dead time, as is recommended at least, it overshoots by 4 % and settles into 2 % 23 % later than said;
with the lag twice the dead time it settles 11 % earlier.

tauc is read from the loop: with L = k e^(-theta s)/s it is 1/k - theta.

Accuracy, dead time up to half the lag, and up to the lag:

  settling, 1 %    0 to +13.6 %; -15.8 to +47.8 %
  settling, 2 %    0 to +12.1 %; -19 to +37.4 %
  settling, 5 %    0 to +9.4 %; 0 to +19.9 %
  rise             0 to +10.8 %; 0 to +17.7 %
  half the change  -6.5 to 0 %; -15.4 to 0 %
"""

from __future__ import annotations

from collections.abc import Mapping

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import at_most, relative_band, words
from specgate.approximations.crowding import signed_percent
from specgate.approximations.features import Features
from specgate.approximations.late import LateResponse
from specgate.approximations.of_loops import CLOSED_LOOP_STABLE, NO_BREAK
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision

Seen = Features | LateResponse

_SKOGESTAD = (
    "S. Skogestad, Simple analytic rules for model reduction and PID controller tuning, J. Process Control, 2003"
)
_NO_LAG = "L is no integrator with a dead time, or its gain leaves no lag"
_HALF = fmpq(1, 2)

_RANGES: Mapping[str, tuple[tuple[int, int], tuple[int, int]]] = {
    "1 %": ((0, 136), (-158, 478)),
    "2 %": ((0, 121), (-190, 374)),
    "5 %": ((0, 94), (0, 199)),
    "rise_time": ((0, 108), (0, 177)),
    "delay_time": ((-65, 0), (-154, 0)),
}
"""Thousandths: dead time up to half the lag; up to the lag."""
_BANDS = {fmpq(1, 100): "1 %", fmpq(1, 50): "2 %", fmpq(1, 20): "5 %"}


def lag_and_dead_time(seen: Seen) -> tuple[fmpq, fmpq] | None:
    """Return tauc and theta, s; None where L is no integrator with a dead time, or leaves no lag."""
    found = None if seen.around is None else seen.around.late
    if found is None:
        return None
    rest, dead_time = found[0].reduced(), found[1]
    if rest.numerator.degree() != 0 or rest.denominator.degree() != 1 or rest.denominator[0] != 0:
        return None
    lag = rest.denominator[1] / rest.numerator[0] - dead_time
    return (lag, dead_time) if lag > 0 else None


def _time(seen: Seen, arguments: Arguments) -> Answer:
    known, band = lag_and_dead_time(seen), relative_band(arguments)
    if known is None:
        return Answer.nothing(NO_BREAK if seen.around is None else _NO_LAG)
    lag, dead_time = known
    if arguments.measure == "rise_time":
        rest, left = 1 - arguments.lower, 1 - arguments.upper
        return Answer.nothing("a lag never reaches 100 %") if left == 0 else _after(rest / left, lag, fmpq(0))
    if arguments.measure == "delay_time":
        return _after(fmpq(2), lag, dead_time)
    if band is None or not 0 < band < 1:
        return Answer.nothing("the formula has numbers for bands in per cent of the change only")
    return _after(1 / band, lag, dead_time)


def _after(ratio: fmpq, lag: fmpq, dead_time: fmpq) -> Answer:
    return Answer.of_ball(lambda bits: _enclosed(ratio, lag, dead_time, bits))


def _enclosed(ratio: fmpq, lag: fmpq, dead_time: fmpq, bits: int) -> arb:
    with working_precision(bits):
        return arb(ratio).log() * lag + dead_time


def _whole(seen: Seen, _: Arguments, __: fmpq | None) -> Found:
    around = seen.around
    return words("around none" if around is None else f"around `{around.name}`", around is not None)


def _kind(seen: Seen, _: Arguments, __: fmpq | None) -> Found:
    fits = lag_and_dead_time(seen) is not None
    return words("it is" if fits else "it is not", fits)


def _ratio(seen: Seen, _: Arguments, threshold: fmpq | None) -> Found:
    known = lag_and_dead_time(seen)
    if known is None or threshold is None:
        return words(_NO_LAG, False)
    return at_most(Answer.of_exact(known[1] / known[0]), threshold)


def _accuracy(seen: Seen, arguments: Arguments) -> Accuracy | None:
    known, band = lag_and_dead_time(seen), relative_band(arguments)
    ordinary = (arguments.lower, arguments.upper) == (fmpq(1, 10), fmpq(9, 10))
    asked = _BANDS.get(band) if band is not None else arguments.measure if ordinary else None
    if known is None or asked is None or asked not in _RANGES:
        return None
    lag, dead_time = known
    short = dead_time <= _HALF * lag
    low, high = (fmpq(end, 1000) for end in _RANGES[asked][0 if short else 1])
    where = "dead time up to half the lag" if short else "dead time up to the lag"
    return Accuracy(low, high, f"{signed_percent(low)} to {signed_percent(high)} % ({where})")


ROW = Approximation(
    name="desired_lag",
    title="A loop with dead time as the lag it was tuned for",
    estimates=("settling_time", "rise_time", "delay_time"),
    formula="theta + tauc ln(1/band); rise 2.2 tauc; tauc = 1/k - theta with L = k e^(-theta s)/s",
    source=_SKOGESTAD,
    conditions=(
        Condition(
            key="break",
            name="a response of unity negative feedback around a declared break",
            source="derived",
            required="around one of the breaks",
            find=_whole,
        ),
        CLOSED_LOOP_STABLE,
        Condition(
            key="kind",
            name="L is an integrator with a dead time",
            source=_SKOGESTAD,
            required="k e^(-theta s)/s with k theta < 1",
            find=_kind,
        ),
        Condition(
            key="dead_time",
            name="dead time over desired lag",
            source=_SKOGESTAD,
            required="<= {threshold}",
            find=_ratio,
            threshold=fmpq(1),
            tighter="smaller",
        ),
    ),
    evaluate=_time,
    accuracy=_accuracy,
    text=__doc__,
    late=True,
)
