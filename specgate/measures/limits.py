"""Measures of a whole course: masks, rates, noise."""

from __future__ import annotations

from specgate.measures.measure import Argument, Measure, UnitRule

ROWS = (
    Measure(
        name="within_mask",
        title="Within a mask",
        subjects=("response",),
        unit=UnitRule.YES_NO,
        definition=(
            "Whether the response stays between the two edges of a mask over time. Touching complies; where the mask "
            "jumps, the looser limit holds; past its last point the mask ends unless it is said to hold for ever."
        ),
        absent_when="never",
        source="specgate's own definition",
        method="proved cell by cell between the edges",
        arguments=(Argument("mask", "mask", "name of the mask", required=True),),
    ),
    Measure(
        name="peak_rate",
        title="Peak rate",
        subjects=("response",),
        unit=UnitRule.SIGNAL_RATE,
        definition="The greatest magnitude of the rate of change of the response; without limit where it jumps.",
        absent_when="the rate grows without bound",
        source="specgate's own definition",
        method="enclosed: extremes of the derivative",
    ),
    Measure(
        name="standard_deviation",
        title="Standard deviation",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition="Standard deviation of the signal in the stationary state under white noise of a stated density.",
        absent_when="the channel is unstable or passes white noise on directly",
        source="integral of the spectral density over frequency",
        method="exact square, enclosed root",
    ),
)
