"""What was changed between two revisions: the declared parts of both Reviews, thing by thing."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from decimal import Decimal
from fractions import Fraction
from typing import Any

from specgate.review.types import Amount, CriterionReview, ParameterReview, RequirementReview, Review, SubsystemReview
from specgate.revisions import fields, limits
from specgate.revisions.amounts import order
from specgate.revisions.pairs import Paired, criteria
from specgate.revisions.said import amount, limit, said
from specgate.revisions.types import Change

_LONG = 16
"""Characters from which a fraction is printed as a decimal."""
_LITERAL = re.compile(r"[-+]?[0-9.][0-9.eE+-]*( \S+)?")


def changes(old: Review, new: Review, pairs: tuple[Paired, ...]) -> tuple[Change, ...]:
    """Return all changes, sorted: the title block and the policy first, then what the files describe, by name."""
    found = [
        *_tool(old, new),
        *fields.changes("project", "project", fields.PROJECT, old.project, new.project),
        *_policy(old, new),
        *_documents(old, new),
        *_parameters(old, new),
        *_subsystems(old, new),
        *_loops(old, new),
        *_requirements(old, new, pairs),
    ]
    return tuple(sorted(found, key=rank))


_KINDS = (
    *("tool", "definition", "project", "policy", "document"),
    *("requirement", "criterion", "parameter", "subsystem", "loop", "response", "break"),
)
_WEIGHTS = ("removed", "loosened", "shifted", "changed", "tightened", "added", "renamed", "reworded")


def rank(change: Change) -> tuple[int, str, int, str, str, str]:
    """Return what changes are sorted by: kind, name, then the gravest first."""
    weight = _WEIGHTS.index(change.how)
    return _KINDS.index(change.kind), change.name, weight, change.what, change.old or "", change.new or ""


# --- the tool, the policy, the documents ----------------------------------------------------------------------


def _tool(old: Review, new: Review) -> Iterator[Change]:
    if old.tool != new.tool:
        was, now = (f"{side.tool.name} {side.tool.version}" for side in (old, new))
        yield Change("tool", "specgate", "version", "changed", was, now, False)
    for name in sorted(old.definitions.keys() & new.definitions.keys()):
        before, after = old.definitions[name], new.definitions[name]
        if before.text != after.text:
            yield Change("definition", name, "text", "reworded", before.text, after.text, False)


def _policy(old: Review, new: Review) -> Iterator[Change]:
    yield from fields.changes("policy", "project", fields.POLICY, old.policy, new.policy)
    before, after = _thresholds(old), _thresholds(new)
    for key in sorted(before.keys() | after.keys()):
        was, now = before.get(key), after.get(key)
        if was != now:
            how = "added" if was is None else "removed" if now is None else "changed"
            yield Change("policy", key[0], key[1], how, was, now, True)


def _thresholds(review: Review) -> dict[tuple[str, str], str]:
    every = review.policy.changed_thresholds
    return {(str(one.get("approximation")), str(one.get("condition"))): str(one.get("project")) for one in every}


def _documents(old: Review, new: Review) -> Iterator[Change]:
    before, after = old.specification.documents, new.specification.documents
    yield from fields.come_and_gone("document", before, after)
    for name in sorted(before.keys() & after.keys()):
        for key in sorted(before[name].keys() | after[name].keys()):
            was, now = before[name].get(key), after[name].get(key)
            if was != now:
                yield Change("document", name, key, "changed", said(was), said(now), key in ("issue", "date"))


# --- parameters and subsystems --------------------------------------------------------------------------------


def _parameters(old: Review, new: Review) -> Iterator[Change]:
    before, after = old.specification.parameters, new.specification.parameters
    yield from fields.come_and_gone("parameter", before, after)
    for name in sorted(before.keys() & after.keys()):
        yield from _parameter(name, before[name], after[name])


def _parameter(name: str, old: ParameterReview, new: ParameterReview) -> Iterator[Change]:
    rest = tuple(one for one in fields.PARAMETER if one.name != "value")
    same = same_value(old, new)
    rewritten = old.as_written != new.as_written
    # a formula whose text stands has another value because of a parameter that is listed itself
    if rewritten or (not same and _LITERAL.fullmatch(new.as_written)):
        how = "reworded" if same else "changed"
        texts = (old.as_written, new.as_written) if rewritten else (_value(old), _value(new))
        yield Change("parameter", name, "value", how, *texts, not same, old.location, new.location)
    yield from fields.changes("parameter", name, rest, old, new)


def same_value(old: ParameterReview, new: ParameterReview) -> bool:
    """Tell whether a parameter has the same value on both sides, however it is written."""
    sides = (Amount(one.value, one.unit, one.exact) for one in (old, new))
    return order(*sides) == 0


def _value(parameter: ParameterReview) -> str:
    return amount(Amount(parameter.value, parameter.unit, parameter.exact))


def _subsystems(old: Review, new: Review) -> Iterator[Change]:
    before, after = old.specification.subsystems, new.specification.subsystems
    yield from fields.come_and_gone("subsystem", before, after)
    moved = _moved(old, new)
    for name in sorted(before.keys() & after.keys()):
        was, now = before[name], after[name]
        found = list(fields.changes("subsystem", name, fields.SUBSYSTEM, was, now))
        yield from found
        if all(one.what != "model" for one in found) and _rebuilt(was, now, moved):
            places = was.location, now.location
            yield Change("subsystem", name, "model", "changed", _transfer(was), _transfer(now), True, *places)


def _moved(old: Review, new: Review) -> frozenset[str]:
    """Return the parameters that have another value, or stand on one side only."""
    before, after = old.specification.parameters, new.specification.parameters
    both = before.keys() & after.keys()
    return frozenset(
        {*(before.keys() ^ after.keys()), *(name for name in both if not same_value(before[name], after[name]))}
    )


def _rebuilt(old: SubsystemReview, new: SubsystemReview, moved: frozenset[str]) -> bool:
    """Tell whether a model was changed itself, and not by the parameters that it reads."""
    if old.reads != new.reads:
        return True
    same = old.numerators == new.numerators and old.denominator == new.denominator
    return not same and not moved & set(new.reads)


def _transfer(one: SubsystemReview) -> str:
    above = "; ".join(f"[{', '.join(map(_short, part))}]" for part in one.numerators.values())
    return f"{above} / [{', '.join(map(_short, one.denominator))}]"


def _short(coefficient: str) -> str:
    """Return a rational as it stands, where it is long as a decimal of ten digits."""
    if len(coefficient) <= _LONG:
        return coefficient
    try:
        value = Fraction(coefficient)
    except (ValueError, ZeroDivisionError):  # a coefficient that this program does not write
        return coefficient
    return f"{Decimal(value.numerator) / Decimal(value.denominator):.10g}"


# --- loops ----------------------------------------------------------------------------------------------------


def _loops(old: Review, new: Review) -> Iterator[Change]:
    yield from fields.come_and_gone("loop", old.loops, new.loops)
    for name in sorted(old.loops.keys() & new.loops.keys()):
        was, now = old.loops[name], new.loops[name]
        yield from fields.changes("loop", name, fields.LOOP, was, now)
        yield from _inside("response", name, fields.RESPONSE, was.responses, now.responses)
        yield from _inside("break", name, fields.BREAK, was.breaks, now.breaks)


def _inside(
    kind: str, loop: str, declared: tuple[fields.Declared, ...], old: Mapping[str, Any], new: Mapping[str, Any]
) -> Iterator[Change]:
    before, after = ({f"{loop}.{name}": one for name, one in side.items()} for side in (old, new))
    yield from fields.come_and_gone(kind, before, after)
    for name in sorted(before.keys() & after.keys()):
        yield from fields.changes(kind, name, declared, before[name], after[name])


# --- requirements ---------------------------------------------------------------------------------------------


def _requirements(old: Review, new: Review, pairs: tuple[Paired, ...]) -> Iterator[Change]:
    for pair in pairs:
        was = None if pair.old is None else old.requirements[pair.old]
        now = None if pair.new is None else new.requirements[pair.new]
        if was is None or now is None:
            how = "added" if was is None else "removed"
            places = fields.located(was), fields.located(now)
            yield Change("requirement", pair.id, "", how, None, None, True, *places)
            continue
        if pair.old != pair.new:
            yield Change("requirement", pair.id, "id", "renamed", pair.old, pair.new, False, was.location, now.location)
        yield from fields.changes("requirement", pair.id, fields.REQUIREMENT, was, now)
        yield from _criteria(pair.id, was, now)


def _criteria(name: str, old: RequirementReview, new: RequirementReview) -> Iterator[Change]:
    for was, now in criteria(old.criteria, new.criteria):
        if was is None or now is None:
            how, there = ("added", now) if was is None else ("removed", was)
            texts = None if was is None else limit(was.limit), None if now is None else limit(now.limit)
            places = fields.located(was), fields.located(now)
            yield Change("criterion", name, subject(there), how, *texts, True, *places)
        else:
            yield from _criterion(name, was, now)


def _criterion(name: str, old: CriterionReview, new: CriterionReview) -> Iterator[Change]:
    about, places = subject(new) if old.on == new.on else new.measure, (old.location, new.location)
    if old.on != new.on:
        yield Change("criterion", name, f"{about}: subject", "changed", old.on, new.on, True, *places)
    moved = limits.compared(old.limit, new.limit)
    if moved != limits.SAME:
        texts = limit(old.limit), limit(new.limit)
        yield Change("criterion", name, f"{about}: limit", moved, *texts, True, *places)
    elif limit(old.limit) != limit(new.limit):
        texts = limit(old.limit), limit(new.limit)
        yield Change("criterion", name, f"{about}: limit", "reworded", *texts, False, *places)
    if _basis(old) != _basis(new):
        yield Change("criterion", name, f"{about}: basis", "changed", _basis(old), _basis(new), True, *places)
    yield from fields.changes("criterion", name, fields.CRITERION, old, new, prefix=f"{about}: ")


def subject(criterion: CriterionReview | None) -> str:
    """Name a criterion within its requirement."""
    return "" if criterion is None else f"{criterion.measure} of {criterion.on}"


def _basis(criterion: CriterionReview) -> str:
    basis = criterion.basis
    if not basis.chain:
        return basis.kind
    variant = f" ({basis.variant})" if basis.variant else ""
    claim = f", claimed {amount(basis.claimed)}" if basis.claimed else ""
    return f"{' and '.join(basis.chain)}{variant}{claim}"
