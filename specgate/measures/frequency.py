"""Measures over frequency, of a response or of a loop opened at a break."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from flint import fmpq

from specgate.frequency.questions import Gain, OpenLoop
from specgate.measures.inputs import SINGLE
from specgate.measures.measure import Argument, Arguments, Measure, Reader, UnitRule
from specgate.measures.reading import over_frequency
from specgate.response.answers import Answer

_FREQUENCY = (Argument("frequency", "frequency", "frequency at which it is read", required=True),)
_RANGE = (Argument("over", "range", "range of frequencies that is looked at; all unless given"),)
_SAMPLED = (
    " Of a response of a sampled loop it is that of the samples of the signal to an input that is held from sample to "
    "sample, up to half the sampling rate (pi/T)."
)
_ROOTS = (
    "enclosed: isolated roots of exact polynomials in the square of the frequency; where dead time or sampling leaves "
    "no such polynomial, all zeros isolated in balls up to a frequency beyond which none matters"
)


def _at(ask: Callable[[Any, fmpq], Answer]) -> Reader:
    def asked(found: OpenLoop | Gain, arguments: Arguments) -> Answer:
        if arguments.frequency is None:
            raise ValueError("a frequency is wanted")
        return ask(found, arguments.frequency)

    return over_frequency(asked)


ROWS = (
    Measure(
        name="crossover_frequency",
        title="Crossover frequency",
        subjects=("break",),
        unit=UnitRule.RADIAN_PER_SECOND,
        definition="The first frequency at which the magnitude of the open loop is one (0 dB); all are in `crossings`.",
        absent_when="the magnitude is one at no frequency",
        source="IEC 60050-351:2013, section 351-46 (gain crossover angular frequency)",
        method=_ROOTS,
        read=over_frequency(lambda loop, given: loop.crossover_frequency(given.over)),
        always=True,
        arguments=_RANGE,
    ),
    Measure(
        name="phase_crossover_frequency",
        title="Phase crossover frequency",
        subjects=("break",),
        unit=UnitRule.RADIAN_PER_SECOND,
        definition=(
            "The first frequency, zero included, at which the open loop is real and negative (a phase of -180 deg); "
            "all are in `crossings`."
        ),
        absent_when="the open loop is real and negative at no frequency",
        source="IEC 60050-351:2013, section 351-46 (phase crossover angular frequency)",
        method=_ROOTS,
        read=over_frequency(lambda loop, given: loop.phase_crossover_frequency(given.over)),
        arguments=_RANGE,
    ),
    Measure(
        name="gain_at",
        title="Gain at a frequency",
        subjects=("response", "break"),
        unit=UnitRule.DECIBEL,
        definition="Magnitude of the frequency response at the stated frequency." + _SAMPLED,
        absent_when="a pole lies on the imaginary axis at that frequency",
        source="IEC 60050-351:2013, section 351-45 (frequency response)",
        method="enclosed: the root of an exact square; through dead time or samplers in balls",
        read=_at(lambda found, frequency: found.gain_at(frequency)),
        arguments=_FREQUENCY,
        signed=True,
        inputs=SINGLE,
    ),
    Measure(
        name="phase_at",
        title="Phase at a frequency",
        subjects=("response", "break"),
        unit=UnitRule.DEGREE,
        definition=(
            "Phase of the frequency response at the stated frequency, followed continuously from zero frequency (an "
            "integrator begins at -90 deg, a negative gain at -180 deg). An undamped pole is passed by -180 deg, an "
            "undamped zero by 180 deg, as if they were slightly damped." + _SAMPLED
        ),
        absent_when="a pole or zero lies on the imaginary axis at that frequency",
        source="IEC 60050-351:2013, section 351-45 (frequency response)",
        method="enclosed: the angles of certified poles and zeros; through dead time or samplers followed in balls",
        read=_at(lambda found, frequency: found.phase_at(frequency)),
        arguments=_FREQUENCY,
        signed=True,
        inputs=SINGLE,
    ),
    Measure(
        name="peak_gain",
        title="Peak gain",
        subjects=("break",),
        unit=UnitRule.DECIBEL,
        definition="The greatest magnitude of the open loop over frequency.",
        absent_when="the magnitude grows without bound (a pole on the imaginary axis)",
        source="specgate's own definition",
        method=_ROOTS,
        read=over_frequency(lambda loop, given: loop.peak_gain(given.over)),
        arguments=_RANGE,
        signed=True,
    ),
    Measure(
        name="bandwidth",
        title="Bandwidth",
        subjects=("response",),
        unit=UnitRule.RADIAN_PER_SECOND,
        definition=(
            "The first frequency at which the gain falls 3 dB (10^(-3/20)) below its value at zero frequency."
            + _SAMPLED
        ),
        absent_when="the gain at zero frequency is zero or infinite, or never falls so far; a mode grows",
        source="common practice; the constant and the first crossing fixed by specgate",
        method=_ROOTS,
        read=over_frequency(lambda gain, _: gain.bandwidth()),
        inputs=SINGLE,
    ),
    Measure(
        name="resonance_peak",
        title="Resonance peak",
        subjects=("response",),
        unit=UnitRule.DECIBEL,
        definition="The greatest gain over frequency, relative to the gain at zero frequency." + _SAMPLED,
        absent_when="the gain at zero frequency is zero or infinite; a pole lies on the imaginary axis, or right of it",
        source="common practice",
        method=_ROOTS,
        read=over_frequency(lambda gain, given: gain.resonance_peak(given.over)),
        arguments=_RANGE,
        inputs=SINGLE,
    ),
)
