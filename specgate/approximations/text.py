"""What `specgate explain` says of an approximation."""

from __future__ import annotations

from specgate.approximations.approximation import Approximation
from specgate.approximations.table import APPROXIMATIONS, BY_RULE, LATER, chain, without_row
from specgate.measures.text import Explanation


def describe(name: str) -> Explanation:
    """Return the text on an approximation. Raises KeyError for a name that the catalogue does not know."""
    if name in LATER:
        what = f"{LATER[name][0].upper()}{LATER[name][1:]}."
        return Explanation(name, f"{what}\n\nThis version reads and keeps it, and does not audit it yet.", "")
    if name in BY_RULE:
        return Explanation(name, f"{without_row(name)}. `specgate explain {BY_RULE[name]}` tells how.", "")
    row = APPROXIMATIONS[name]
    parts = (
        row.text.strip(),
        f"Formula: {row.formula}.",
        _variants(row),
        f"Estimates: {', '.join(row.estimates)}.",
        _range(name),
        _alternatives(row),
    )
    sources = dict.fromkeys(one.source for one in row.variants) or [row.source]
    return Explanation(row.title, "\n\n".join(part for part in parts if part), "; ".join(sources))


def _variants(row: Approximation) -> str:
    """List the variants, the one that is offered first, each with what its range adds to that of the row."""
    lines = [f"  {one.name}: {one.formula}, for {one.for_}; {one.source}" for one in row.variants]
    return "\n".join(["Variants (`variant:` in the basis; the first unless one is named):", *lines]) if lines else ""


def _range(name: str) -> str:
    """List the conditions on what the row estimates, those of its premises first."""
    lines = []
    estimates = APPROXIMATIONS[name].estimates
    for row in chain(name):
        for condition in row.conditions:
            if condition.concerns and not set(condition.concerns) & set(estimates):
                continue
            words = f"  {condition.named(condition.threshold)}: {condition.asked(condition.threshold)}"
            whose = "" if row.name == name else f" (premise {row.name})"
            part = [measure for measure in estimates if measure in condition.concerns]
            needed = f" [for {', '.join(part)}]" if part and len(part) < len(estimates) else ""
            lines.append(f"{words}{whose}{needed}; {condition.source}")
    return "\n".join(["Range:", *lines])


def _alternatives(row: Approximation) -> str:
    return f"Where it does not apply: {', '.join((*row.alternatives, 'the computed value'))}."
