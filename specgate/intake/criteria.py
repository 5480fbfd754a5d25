"""Criteria: what is measured on what, with which arguments, against which limit, and on which basis."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Literal

from flint import fmpq

from specgate.approximations.table import APPROXIMATIONS, stray
from specgate.intake.context import Context, items, table, text, texts
from specgate.intake.nodes import Items, Node, Number, Spot, Table, Text, Truth, as_kept
from specgate.intake.values import Reader
from specgate.measures.table import MEASURES
from specgate.project.percent import relative_to_change
from specgate.project.types import Basis, Claim, Criterion, Limit, MaskDefinition, Subject, Value
from specgate.terms.expressions import is_read

_ARGUMENTS = ("band", "from", "to", "time", "frequency")
LimitKind = Literal["at_most", "at_least", "between", "within", "equals"]
LIMITS: tuple[LimitKind, ...] = (
    "at_most",
    "at_least",
    "between",
    "within",
    "equals",
)
_KEPT = ("cases",)
_CLAIM = re.compile(r"[-+]?(?P<whole>[0-9]*)(?:\.(?P<part>[0-9]*))?(?:[eE](?P<power>[+-]?[0-9]+))?(?:\s.*)?", re.DOTALL)


def criterion(node: Node, place: Spot, context: Context) -> Criterion | None:
    """Read one criterion as far as it can be read; None where not even subject and measure are known."""
    body = table(node)
    if body is None:
        return None
    reader = Reader(context)
    subject = _subject(body, context)
    measure = text(body.get("measure"))
    limit = _limit(body, place, reader)
    arguments = {name: reader.value(value) for name in _ARGUMENTS if (value := body.get(name)) is not None}
    kept = _kept(body, reader)
    over = reader.pair(body.get("over"))
    grounds = body.get("basis")
    rests_on = basis(grounds, context) if grounds is not None else None
    mask = _mask(body.get("mask"), context)
    _check_rising(arguments, place, context)
    if measure is None or measure not in MEASURES or subject is None:
        return None
    if rests_on is not None and not estimates_one(rests_on, (measure,), context):
        rests_on = None
    return Criterion(
        subject, measure, arguments, limit, place.place, rests_on, evaluation(body.get("evaluate")), kept, over, mask
    )


def _check_rising(arguments: Mapping[str, Value], place: Spot, context: Context) -> None:
    """See that `from` lies below `to`, where either may be left out."""
    ends = {name: arguments[name] for name in ("from", "to") if name in arguments}
    if not ends or not all(is_read(value.expression) for value in ends.values()):
        return
    low, high = (relative_to_change(ends[name]) if name in ends else None for name in ("from", "to"))
    low, high = fmpq(1, 10) if low is None else low, fmpq(9, 10) if high is None else high
    if low >= high:
        message = "`from` has to be less than `to`, which are 10 % and 90 % where they are left out"
        context.collector.error("schema-violation", message, place.place)


# --- subject -------------------------------------------------------------------------------------------------


def _subject(node: Table, context: Context) -> Subject | None:
    """Read what a criterion is about; a name that is not known is reported, and kept."""
    kinds: tuple[Literal["response", "break"], ...] = ("response", "break")
    for kind in kinds:
        written = node.get(kind)
        if isinstance(written, Text):
            return _part_of_loop(kind, written, context)
    written = node.get("loop")
    if not isinstance(written, Text):
        return None
    name = written.value.strip()
    if name not in context.loops:
        context.unknown("loop", name, context.loops, written.spot.place)
    return Subject("loop", name, None, written.spot.place)


def _part_of_loop(kind: Literal["response", "break"], node: Text, context: Context) -> Subject:
    loop, dot, name = node.value.strip().partition(".")
    if dot:  # else the schema says that `loop.name` is wanted
        _check_part(kind, loop, name, node, context)
    return Subject(kind, loop, name, node.spot.place)


def _check_part(kind: Literal["response", "break"], loop: str, name: str, node: Text, context: Context) -> None:
    names = context.loops.get(loop)
    if names is None:
        context.unknown("loop", loop, context.loops, node.spot.place)
        return
    wanted, other = names.responses, names.breaks
    if kind == "break":
        wanted, other = other, wanted
    if name in wanted:
        return
    if name in other:
        right = "break" if kind == "response" else "response"
        message = f"`{loop}.{name}` is a {right}: write `{right}: {loop}.{name}`"
        context.collector.error("name-unknown", message, node.spot.place)
    else:
        context.unknown(kind, name, wanted, node.spot.place, loop)


# --- limit ---------------------------------------------------------------------------------------------------


def _limit(node: Table, place: Spot, reader: Reader) -> Limit:
    """Read the limit; one that is missing could not be read."""
    given = next((kind for kind in LIMITS if kind in node.entries), None)
    return Limit("at_most", (reader.unread(node),), place.place) if given is None else limit_of(given, node, reader)


def limit_of(kind: LimitKind, node: Table, reader: Reader) -> Limit:
    """Read the limit of a kind in a table that has one; one of the wrong shape could not be read."""
    entry = node.entries[kind]
    where = entry.key.spot.place
    if kind == "equals" and not isinstance(entry.value, Number):
        truth = entry.value.value if isinstance(entry.value, Truth) else None
        return Limit("equals", () if truth is not None else (reader.unread(node),), where, truth=truth)
    parts = _limit_nodes(kind, node, entry.value)
    return Limit(kind, tuple(reader.unread(node) if part is None else reader.value(part) for part in parts), where)


def _limit_nodes(kind: str, node: Table, value: Node) -> Sequence[Node | None]:
    if kind == "between":
        return items(value) if isinstance(value, Items) and len(value.nodes) == 2 else (None, None)
    return (value, node.get("of")) if kind == "within" else (value,)


def _mask(node: Node | None, context: Context) -> MaskDefinition | None:
    """Return the mask that is named; None where none is, where there is none, or where it was reported."""
    name = text(node)
    if name is None or node is None:
        return None
    if name.strip() not in context.masks:
        context.unknown("mask", name.strip(), sorted(context.masks), node.spot.place)
    mask = context.laid.get(name.strip())
    context.holes += mask is None
    return mask


# --- what is kept ----------------------------------------------------------------------------------------------


def _kept(node: Table, reader: Reader) -> dict[str, object]:
    """Keep what is answered later; names and quantities in it must be right now."""
    evaluate = table(node.get("evaluate"))
    for case in items(node.get("cases")):
        if isinstance(case, Text) and case.value != "all" and case.value not in reader.context.cases:
            reader.context.unknown("case", case.value, sorted(reader.context.cases), case.spot.place)
    kept = {key: as_kept(value) for key in _KEPT if (value := node.get(key)) is not None}
    return {**kept, "evaluate": as_kept(evaluate)} if evaluate is not None else kept


def evaluation(node: Node | None) -> str | None:
    """Return how something is evaluated: nominal, worst_case or probability."""
    return "probability" if isinstance(node, Table) else text(node)


# --- basis -------------------------------------------------------------------------------------------------------


def basis(node: Node, context: Context) -> Basis | None:
    """Read a basis; None where it is of no kind. A name in it that is not known is reported, and left out."""
    place = node.spot.place
    if isinstance(node, Text):
        return Basis("computed", place) if node.value == "computed" else None
    body = table(node)
    if body is None:
        return None
    evidence = body.get("evidence")
    if evidence is not None:
        name = text(evidence) or ""
        if name not in context.evidence:
            context.unknown("evidence", name, sorted(context.evidence), evidence.spot.place)
        return Basis("evidence", place, evidence=name)
    chain, claimed = texts(body.get("approximation")), body.get("claimed")
    claim = _claim(claimed, context) if claimed is not None else None
    if not chain:
        return None
    chosen = body.get("variant")
    named = isinstance(chosen, Text) and _has_variant(chain[-1], chosen, context)
    return Basis("approximation", place, chain, claim, variant=(text(chosen) or "").strip() if named else None)


def _has_variant(name: str, chosen: Text, context: Context) -> bool:
    """Whether an approximation has a formula of this name; approximations answered later are taken as they are."""
    row = APPROXIMATIONS.get(name)
    known = [one.name for one in row.variants] if row is not None else [chosen.value.strip()]
    if chosen.value.strip() in known:
        return True
    if known:
        context.unknown("variant", chosen.value.strip(), known, chosen.spot.place, name)
    else:
        message = f"`{name}` is one formula and has no variants: leave `variant` out"
        context.collector.error("schema-violation", message, chosen.spot.place)
    return False


def _claim(node: Node, context: Context) -> Claim | None:
    value = Reader(context).value(node)
    match = _CLAIM.fullmatch(value.as_written)
    if not is_read(value.expression):
        return None
    if match is None or not (match["whole"] or match["part"]):
        message = "a claimed value is the number that was promised, with its unit, such as `0.71 s`"
        context.collector.error("schema-violation", message, node.spot.place)
        return None
    return Claim(value, int(match["power"] or 0) - len(match["part"] or ""))


def estimates_one(rests_on: Basis, measures: Sequence[str], context: Context) -> bool:
    """See that a basis estimates exactly one of the measures; approximations answered later are taken as they are."""
    if rests_on.kind != "approximation" or rests_on.chain[-1] not in APPROXIMATIONS:
        return True
    twice = next((name for place, name in enumerate(rests_on.chain) if name in rests_on.chain[:place]), None)
    if twice is not None:
        message = f"`{twice}` stands twice in this chain: once is enough"
        context.collector.error("schema-violation", message, rests_on.place)
        return False
    loose = stray(rests_on.chain)
    if loose is not None:
        message = (
            f"`{loose}` leads to nothing in this chain: `{rests_on.chain[-1]}` does not build on it, and it drops no "
            "part of the response"
        )
        context.collector.error("schema-violation", message, rests_on.place)
        return False
    name = rests_on.chain[-1]
    estimated = APPROXIMATIONS[name].estimates
    dropping = next(
        (link for link in rests_on.chain[:-1] if link in APPROXIMATIONS and APPROXIMATIONS[link].reduce), None
    )
    if dropping is not None and not any("response" in MEASURES[measure].subjects for measure in estimated):
        message = f"`{dropping}` drops a part of a response, and `{name}` is not read from one"
        context.collector.error("schema-violation", message, rests_on.place)
        return False
    fitting = [measure for measure in measures if measure in estimated]
    if len(fitting) == 1:
        return True
    what = " or ".join(f"`{measure}`" for measure in estimated)
    if not estimated:
        message = f"`{name}` estimates no measure by itself: name the approximation that builds on it after it"
    elif fitting:
        message = f"`{name}` estimates {what}, and several criteria ask for that: write the basis into one of them"
    else:
        asked = " and ".join(f"`{measure}`" for measure in dict.fromkeys(measures)) or "no measure"
        message = f"`{name}` estimates {what}; what is asked here is {asked}"
    context.collector.error("schema-violation", message, rests_on.place)
    return False
