"""What `specgate explain` says of a measure."""

from __future__ import annotations

from specgate.measures.inputs import INPUTS
from specgate.measures.measure import Measure, UnitRule
from specgate.measures.table import MEASURES
from specgate.terms.precision import HIGHEST
from specgate.terms.records import record

_ON = {"response": "a response", "break": "a break of a loop", "loop": "a loop"}

_ALGEBRAIC = (UnitRule.DECIBEL, UnitRule.RATIO, UnitRule.RADIAN_PER_SECOND)
"""Units of what is read over frequency: roots of polynomials with rational coefficients, where the loop is rational."""


@record
class Explanation:
    """A definition to print: title, text (paragraphs apart by an empty line) and its source."""

    title: str
    text: str
    source: str


def _argument_lines(measure: Measure) -> str:
    lines = [
        f"  {argument.name}: {argument.text}{' (required)' if argument.required else ''}"
        for argument in measure.arguments
    ]
    return "\n".join(["Arguments:", *lines]) if lines else ""


def _input_line(measure: Measure) -> str:
    if "response" not in measure.subjects or measure.inputs == INPUTS:
        return ""
    return f"Exists for the inputs: {', '.join(kind for kind in measure.inputs if kind != 'several')}" + (
        ", and for several at once." if "several" in measure.inputs else "."
    )


def _example(measure: Measure) -> str:
    lines = measure.example.strip().splitlines()
    return "\n".join(["As it is written:", *(f"  {line}" for line in lines)]) if lines else ""


def _limits_line(measure: Measure) -> str:
    if measure.unit is UnitRule.YES_NO:
        return "Limits: `equals: true` or `equals: false`."
    kinds = "at_most, at_least, between, " + ("equals" if measure.unit is UnitRule.COUNT else "within … of")
    refused = " A one-sided limit that a value of the wrong sign would meet is refused." if measure.sided else ""
    return f"Limits: {kinds}; touching one is inside it.{refused}"


def _equality_line(measure: Measure) -> str:
    """Say what decides where the value is the limit itself: no narrower interval would."""
    if measure.unit in (UnitRule.YES_NO, UnitRule.COUNT):
        return ""
    if measure.at_limit is not None:
        return "At its limit: decided by an exact predicate, so that a value equal to the limit meets it."
    if measure.unit is UnitRule.DEGREE and measure.subjects != ("response",):
        return "At its limit: rational parts of a whole turn are decided exactly where the loop is rational."
    if measure.unit in _ALGEBRAIC:
        return "At its limit: decided exactly where the loop is rational and the limit is; in dB by digits alone."
    return (
        "At its limit: decided where the value is known exactly; else more digits are computed, and a value that is "
        f"not told from the limit at {HIGHEST} bits leaves the verdict open."
    )


def describe(name: str) -> Explanation:
    """Return the text on a measure. Raises KeyError for a name that is not in the table."""
    measure = MEASURES[name]
    answered = "" if measure.read is not None else "This version reads and keeps it, and does not answer it yet."
    parts = (
        measure.definition,
        f"Read from {' or '.join(_ON[kind] for kind in measure.subjects)}, in: {measure.unit.value}.",
        _input_line(measure),
        _argument_lines(measure),
        _example(measure),
        _limits_line(measure),
        f"No value: {measure.absent_when}.",
        f"How it is obtained: {measure.method}.",
        _equality_line(measure),
        f"Reported on every {' and '.join(measure.subjects)}, asked for or not." if measure.always else "",
        answered,
    )
    return Explanation(measure.title, "\n\n".join(part for part in parts if part), measure.source)
