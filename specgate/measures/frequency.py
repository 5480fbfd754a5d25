"""Measures over frequency, of a response or of a loop opened at a break."""

from __future__ import annotations

from specgate.measures.measure import Argument, Measure, UnitRule

_FREQUENCY = (Argument("frequency", "frequency", "frequency at which it is read", required=True),)
_RANGE = (Argument("over", "range", "range of frequencies that is looked at; all unless given"),)
_ROOTS = "certified roots of exact polynomials in the square of the frequency"

ROWS = (
    Measure(
        name="crossover_frequency",
        title="Crossover frequency",
        subjects=("break",),
        unit=UnitRule.RADIAN_PER_SECOND,
        definition="The frequency at which the magnitude of the open loop passes through one (0 dB).",
        absent_when="the magnitude never passes through one",
        source="IEC 60050-351:2013, section 351-46 (gain crossover angular frequency)",
        method=_ROOTS,
        arguments=_RANGE,
    ),
    Measure(
        name="phase_crossover_frequency",
        title="Phase crossover frequency",
        subjects=("break",),
        unit=UnitRule.RADIAN_PER_SECOND,
        definition="The frequency at which the phase of the open loop passes through -180 deg.",
        absent_when="the phase never passes through -180 deg",
        source="IEC 60050-351:2013, section 351-46 (phase crossover angular frequency)",
        method=_ROOTS,
        arguments=_RANGE,
    ),
    Measure(
        name="gain_at",
        title="Gain at a frequency",
        subjects=("response", "break"),
        unit=UnitRule.DECIBEL,
        definition="Magnitude of the frequency response at the stated frequency.",
        absent_when="a pole lies on the imaginary axis at that frequency",
        source="IEC 60050-351:2013, section 351-45 (frequency response)",
        method="exact square, enclosed level",
        arguments=_FREQUENCY,
        signed=True,
    ),
    Measure(
        name="phase_at",
        title="Phase at a frequency",
        subjects=("response", "break"),
        unit=UnitRule.DEGREE,
        definition=(
            "Phase of the frequency response at the stated frequency, followed continuously from zero frequency (an "
            "integrator begins at -90 deg, a negative gain at -180 deg)."
        ),
        absent_when="a pole or zero lies on the imaginary axis at that frequency",
        source="IEC 60050-351:2013, section 351-45 (frequency response)",
        method="enclosed: sum over certified poles and zeros",
        arguments=_FREQUENCY,
        signed=True,
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
        arguments=_RANGE,
        signed=True,
    ),
    Measure(
        name="bandwidth",
        title="Bandwidth",
        subjects=("response",),
        unit=UnitRule.RADIAN_PER_SECOND,
        definition="The first frequency at which the gain falls 3 dB (10^(-3/20)) below its value at zero frequency.",
        absent_when="the gain at zero frequency is zero or infinite, or never falls so far",
        source="common practice; the constant and the first crossing fixed by specgate",
        method=_ROOTS,
    ),
    Measure(
        name="resonance_peak",
        title="Resonance peak",
        subjects=("response",),
        unit=UnitRule.DECIBEL,
        definition="The greatest gain over frequency, relative to the gain at zero frequency.",
        absent_when="the gain at zero frequency is zero or infinite, or a pole lies on the imaginary axis",
        source="common practice",
        method=_ROOTS,
        arguments=_RANGE,
    ),
)
