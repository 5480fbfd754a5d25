"""Which measures of a response exist for which input, as far as that alone tells; which are always reported."""

from __future__ import annotations

from collections.abc import Mapping

INPUTS = (
    "step",
    "ramp",
    "parabola",
    "impulse",
    "ramp_and_hold",
    "pulse",
    "one_minus_cosine",
    "sine",
    "white_noise",
    "several",
)
"""The kinds of input; `several` for several at once."""

SINGLE = tuple(kind for kind in INPUTS if kind != "several")
"""Inputs that one channel answers to."""

COURSE = tuple(kind for kind in INPUTS if kind != "white_noise")
"""Inputs with a course in time."""

ENDING = ("step", "impulse", "ramp_and_hold", "pulse", "one_minus_cosine", "several")
"""Inputs that are constant in the end, so that a response may settle and a change may be left."""

VANISHING = ("step", "ramp", "parabola", "impulse", "ramp_and_hold", "pulse", "one_minus_cosine", "several")
"""Inputs to which an error may vanish in the end."""

SINE = ("sine",)
NOISE = ("white_noise",)

_EXTREMES = ("maximum_value", "minimum_value", "peak_deviation")
_ENDS = ("final_value", "initial_value", *_EXTREMES)
_ORIGIN = ("poles_at_origin", "zeros_at_origin")

REPORTED: Mapping[str, tuple[str, ...]] = {
    "ramp": ("steady_state_error", *_ORIGIN),
    "parabola": ("steady_state_error", *_ORIGIN),
    "impulse": (*_ENDS, *_ORIGIN),
    "pulse": (*_ENDS, *_ORIGIN),
    "one_minus_cosine": (*_ENDS, *_ORIGIN),
    "sine": (*_EXTREMES, "steady_state_amplitude", "steady_state_phase"),
    "white_noise": ("standard_deviation",),
    "several": (*_ENDS, "steady_state_error"),
}
"""What is reported on a response to such an input, asked for or not; of steps and held ramps every row that says so."""
