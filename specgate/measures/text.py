"""What `specgate explain` says of a measure."""

from __future__ import annotations

from specgate.measures.inputs import INPUTS
from specgate.measures.measure import Measure
from specgate.measures.table import MEASURES
from specgate.terms.records import record

_ON = {"response": "a response", "break": "a break of a loop", "loop": "a loop"}


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


def describe(name: str) -> Explanation:
    """Return the text on a measure. Raises KeyError for a name that is not in the table."""
    measure = MEASURES[name]
    answered = "" if measure.read is not None else "This version reads and keeps it, and does not answer it yet."
    parts = (
        measure.definition,
        f"Read from {' or '.join(_ON[kind] for kind in measure.subjects)}, in: {measure.unit.value}.",
        _input_line(measure),
        _argument_lines(measure),
        f"No value: {measure.absent_when}.",
        f"How it is obtained: {measure.method}.",
        answered,
    )
    return Explanation(measure.title, "\n\n".join(part for part in parts if part), measure.source)
