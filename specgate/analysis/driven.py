"""What is said of inputs and of the error, whatever the loop is made of."""

from __future__ import annotations

from collections.abc import Sequence

from specgate.project.signals import LoopSignals
from specgate.response.answers import Absent
from specgate.response.inputs import Input

NOISE = Absent("white noise has no course in time: only its standard deviation is known", proved=False)
SEVERAL = Absent("several inputs are driven at once: there is no single channel", proved=False)
ERROR_JUMPS = Absent("the error jumps without limit: the reference is differentiated", proved=False)

UNASKED = ""
"""In place of the name of a reference: nobody wants the error, so that none is made."""
_UNASKED = Absent("nobody asks for the error here", proved=False)


def plain(inputs: Sequence[Input]) -> bool:
    """Whether a response is to a single step."""
    return [given.kind for given in inputs] == ["step"] and inputs[0].begin == 0


def beyond(inputs: Sequence[Input]) -> str:
    """Say why formulas for a step do not apply."""
    if len(inputs) > 1:
        return "several inputs are driven at once"
    return f"the input is {inputs[0].kind.replace('_', ' ')}" if inputs[0].kind != "step" else "the step is delayed"


def improper(source: str, target: str, above: int, below: int) -> str:
    """Say that a channel is improper; above, below: degrees of numerator and denominator."""
    way = f"from {source} to {target} the numerator's degree {above} "
    if above > below:
        return (
            f"{way}exceeds the denominator's {below}: a step has no response through an ideal derivative; give the "
            "derivative a lag"
        )
    return f"{way}is the denominator's: an impulse would pass straight through; give the channel a lag"


def void(source: str, target: str) -> Absent:
    """Say that a mode which does not decay is hidden."""
    return Absent(f"a mode that does not decay is hidden on the way from {source} to {target}")


def reference_of(named: str | None, sources: Sequence[str], to: str, signals: LoopSignals) -> str | Absent:
    """Return the name of what the error is measured from, or why there is none.

    Without a name it is the input that is driven, of several the one of the signal's dimension.
    """
    if named == UNASKED:
        return _UNASKED
    if named is not None:
        return named
    unit = signals.unit(to)
    fitting = [source for source in sources if signals.unit(source).dimension == unit.dimension]
    if len(fitting) == 1:
        return fitting[0]
    return Absent(_no_reference(sources, to, signals, many=len(fitting) > 1), proved=False)


def _no_reference(sources: Sequence[str], to: str, signals: LoopSignals, *, many: bool) -> str:
    named = " and ".join(f"{source} ({signals.unit(source).symbol})" for source in sources)
    if many:
        return f"the error may be measured from {named}: name one, or a signal, as `reference`"
    which = "are not of one dimension" if len(sources) == 1 else "have no dimension in common"
    return (
        f"{named} and {to} ({signals.unit(to).symbol}) {which}: "
        "name the signal that the error is measured from as `reference`"
    )
