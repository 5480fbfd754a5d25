"""Stability margins of a loop opened at a break."""

from __future__ import annotations

from collections.abc import Callable

from specgate.frequency.questions import OpenLoop
from specgate.measures.measure import Argument, Arguments, Measure, UnitRule
from specgate.measures.reading import over_frequency
from specgate.response.answers import Answer

_NO_MARGIN = "the closed loop is unstable as it is; a margin that nothing uses up is infinite and meets every at_least"
_ALWAYS = ("gain_margin", "phase_margin", "delay_margin", "sensitivity_peak")
_CROSSINGS = (
    "enclosed: all crossings, from isolated roots of exact polynomials in the square of the frequency; zero and "
    "infinite frequency are looked at as well; where dead time or sampling leaves no such polynomial, all zeros "
    "isolated in balls up to a frequency beyond which none matters"
)
_STATIONARY = (
    "enclosed: the greatest of |1/(1+L)| where it stands still, from isolated roots of an exact polynomial in the "
    "square of the frequency, and at zero and infinite frequency or the ends of a range; where dead time or sampling "
    "leaves no such polynomial, zeros isolated in balls"
)
_RANGE = (Argument("over", "range", "range of frequencies that is looked at; all unless given"),)


def _margin(
    name: str,
    title: str,
    unit: UnitRule,
    definition: str,
    source: str,
    ask: Callable[[OpenLoop, Arguments], Answer],
    method: str = _CROSSINGS,
) -> Measure:
    return Measure(
        name,
        title,
        ("break",),
        unit,
        definition,
        _NO_MARGIN,
        source,
        method,
        read=over_frequency(ask),
        arguments=_RANGE,
        always=name in _ALWAYS,
    )


_GAIN = "IEC 60050-351:2013, 351-46-07 (gain margin), over all crossings"
_PHASE = "IEC 60050-351:2013, 351-46-05 (phase margin), over all crossings"

ROWS = (
    _margin(
        "gain_margin",
        "Gain margin",
        UnitRule.DECIBEL,
        "The smallest change of the loop gain, up or down, at which the loop is stable no more; positive, with its "
        "direction. Called fragile where a change of less than 0.6 deg in the phase would create or remove the "
        "crossing that decides.",
        _GAIN,
        lambda loop, given: loop.gain_margin(given.over),
    ),
    _margin(
        "gain_margin_up",
        "Gain margin upwards",
        UnitRule.DECIBEL,
        "The smallest rise of the loop gain at which the loop is stable no more.",
        _GAIN,
        lambda loop, given: loop.gain_margin_up(given.over),
    ),
    _margin(
        "gain_margin_down",
        "Gain margin downwards",
        UnitRule.DECIBEL,
        "The smallest fall of the loop gain at which the loop is stable no more: of a loop around an unstable plant, "
        "or one that is stable between two gains only. Positive.",
        _GAIN,
        lambda loop, given: loop.gain_margin_down(given.over),
    ),
    _margin(
        "phase_margin",
        "Phase margin",
        UnitRule.DEGREE,
        "The smallest change of phase, lag or lead, at which the loop is stable no more; positive, with its direction. "
        "Called fragile where a change of less than 1 % in the gain would create or remove the crossing that decides.",
        _PHASE,
        lambda loop, given: loop.phase_margin(given.over),
    ),
    _margin(
        "phase_margin_lag",
        "Phase margin against lag",
        UnitRule.DEGREE,
        "The smallest added phase lag at which the loop is stable no more, below 360 deg.",
        _PHASE,
        lambda loop, given: loop.phase_margin_lag(given.over),
    ),
    _margin(
        "phase_margin_lead",
        "Phase margin against lead",
        UnitRule.DEGREE,
        "The smallest added phase lead at which the loop is stable no more, below 360 deg.",
        _PHASE,
        lambda loop, given: loop.phase_margin_lead(given.over),
    ),
    _margin(
        "delay_margin",
        "Delay margin",
        UnitRule.SECOND,
        "The smallest added dead time at which the loop is stable no more: the least of lag over frequency at the gain "
        "crossings; zero where the loop gain does not fall below one at high frequency. Of a sampled loop: how much "
        "later the held output may arrive, which is no lag of the pulse transfer function and has a search of its own.",
        "specgate's own definition; the least phase lag over frequency at the gain crossings",
        lambda loop, given: loop.delay_margin(given.over),
    ),
    _margin(
        "least_distance",
        "Least distance to -1",
        UnitRule.RATIO,
        "The least distance of the open-loop frequency response from the point -1.",
        "reciprocal of the sensitivity peak",
        lambda loop, given: loop.least_distance(given.over),
        _STATIONARY,
    ),
    _margin(
        "sensitivity_peak",
        "Sensitivity peak",
        UnitRule.RATIO,
        "The greatest gain over frequency of 1/(1+L), by which the loop amplifies what disturbs it, with the frequency "
        "where it is taken; where it is only approached, at infinite frequency, there is none.",
        "Skogestad, Postlethwaite: Multivariable Feedback Control, 2nd ed. 2005, section 2.4",
        lambda loop, given: loop.sensitivity_peak(given.over),
        _STATIONARY,
    ),
)
