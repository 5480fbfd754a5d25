"""Criteria: what is measured on what, with which arguments, against which limit, and on which basis."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Literal

from flint import fmpq

from specgate.approximations.table import APPROXIMATIONS, stray
from specgate.intake.context import Context, items, table, text, texts
from specgate.intake.nodes import Items, Node, Number, Spot, Table, Text, Truth, as_kept
from specgate.intake.values import Reader, complete
from specgate.measures.table import MEASURES
from specgate.project.percent import relative_to_change
from specgate.project.types import Basis, Claim, Criterion, Limit, MaskDefinition, Subject, Value

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
    """Read one criterion. None if something in it was reported."""
    body = table(node)
    if body is None:
        return None
    reader = Reader(context)
    subject = _subject(body, context)
    measure = text(body.get("measure"))
    limit = _limit(body, reader)
    arguments = {name: reader.value(body.get(name)) for name in _ARGUMENTS if body.get(name) is not None}
    given = {name: value for name, value in arguments.items() if value is not None}
    kept = _kept(body, reader)
    written_over = body.get("over")
    over = reader.pair(written_over)
    grounds = body.get("basis")
    rests_on = basis(grounds, context) if grounds is not None else None
    if measure is None or measure not in MEASURES or subject is None or limit is None or kept is None:
        return None
    if len(given) < len(arguments) or (grounds is not None and rests_on is None):
        return None
    if written_over is not None and over is None:
        return None
    laid = body.get("mask")
    mask = _mask(laid, context)
    if laid is not None and mask is None:
        return None
    if rests_on is not None and not estimates_one(rests_on, (measure,), context):
        return None
    if not _rising(given, place, context):
        return None
    return Criterion(
        subject, measure, given, limit, place.place, rests_on, evaluation(body.get("evaluate")), kept, over, mask
    )


def _rising(arguments: Mapping[str, Value], place: Spot, context: Context) -> bool:
    """See that `from` lies below `to`, where either may be left out."""
    if not {"from", "to"} & set(arguments):
        return True
    low, high = (relative_to_change(arguments[name]) if name in arguments else None for name in ("from", "to"))
    low, high = fmpq(1, 10) if low is None else low, fmpq(9, 10) if high is None else high
    if low < high:
        return True
    message = "`from` has to be less than `to`, which are 10 % and 90 % where they are left out"
    context.collector.error("schema-violation", message, place.place)
    return False


# --- subject -------------------------------------------------------------------------------------------------


def _subject(node: Table, context: Context) -> Subject | None:
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
        return None
    return Subject("loop", name, None, written.spot.place)


def _part_of_loop(kind: Literal["response", "break"], node: Text, context: Context) -> Subject | None:
    loop, dot, name = node.value.strip().partition(".")
    if not dot:
        return None  # the schema wants `loop.name`
    names = context.loops.get(loop)
    if names is None:
        context.unknown("loop", loop, context.loops, node.spot.place)
        return None
    wanted, other = names.responses, names.breaks
    if kind == "break":
        wanted, other = other, wanted
    if name in wanted:
        return Subject(kind, loop, name, node.spot.place)
    if name in other:
        right = "break" if kind == "response" else "response"
        message = f"`{loop}.{name}` is a {right}: write `{right}: {loop}.{name}`"
        context.collector.error("name-unknown", message, node.spot.place)
    else:
        context.unknown(kind, name, wanted, node.spot.place, loop)
    return None


# --- limit ---------------------------------------------------------------------------------------------------


def _limit(node: Table, reader: Reader) -> Limit | None:
    given = next((kind for kind in LIMITS if kind in node.entries), None)
    return None if given is None else limit_of(given, node, reader)


def limit_of(kind: LimitKind, node: Table, reader: Reader) -> Limit | None:
    """Read the limit of a kind in a table that has one. None if something in it was reported."""
    entry = node.entries[kind]
    where = entry.key.spot.place
    if kind == "equals" and not isinstance(entry.value, Number):
        return Limit("equals", (), where, truth=entry.value.value) if isinstance(entry.value, Truth) else None
    values = complete([reader.value(part) for part in _limit_nodes(kind, node, entry.value)])
    return Limit(kind, values, where) if values else None


def _limit_nodes(kind: str, node: Table, value: Node) -> Sequence[Node | None]:
    if kind == "between":
        return items(value) if isinstance(value, Items) else ()
    return (value, node.get("of")) if kind == "within" else (value,)


def _mask(node: Node | None, context: Context) -> MaskDefinition | None:
    """Return the mask that is named; None where none is, where there is none, or where it was reported."""
    name = text(node)
    if name is not None and name.strip() not in context.masks and node is not None:
        context.unknown("mask", name.strip(), sorted(context.masks), node.spot.place)
    return None if name is None else context.laid.get(name.strip())


# --- what is kept ----------------------------------------------------------------------------------------------


def _kept(node: Table, reader: Reader) -> dict[str, object] | None:
    """Keep what is answered later; names and quantities in it must be right now."""
    evaluate = table(node.get("evaluate"))
    for case in items(node.get("cases")):
        if isinstance(case, Text) and case.value != "all" and case.value not in reader.context.cases:
            reader.context.unknown("case", case.value, sorted(reader.context.cases), case.spot.place)
            return None
    kept = {key: as_kept(value) for key in _KEPT if (value := node.get(key)) is not None}
    return {**kept, "evaluate": as_kept(evaluate)} if evaluate is not None else kept


def evaluation(node: Node | None) -> str | None:
    """Return how something is evaluated: nominal, worst_case or probability."""
    return "probability" if isinstance(node, Table) else text(node)


# --- basis -------------------------------------------------------------------------------------------------------


def basis(node: Node, context: Context) -> Basis | None:
    """Read a basis. None if something in it was reported."""
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
            return None
        return Basis("evidence", place, evidence=name)
    chain, claimed = texts(body.get("approximation")), body.get("claimed")
    claim = _claim(claimed, context) if claimed is not None else None
    if not chain or (claimed is not None and claim is None):
        return None
    chosen = body.get("variant")
    variant = text(chosen)
    if chosen is not None and not (isinstance(chosen, Text) and _has_variant(chain[-1], chosen, context)):
        return None
    return Basis("approximation", place, chain, claim, variant=None if variant is None else variant.strip())


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
    match = _CLAIM.fullmatch(value.as_written) if value is not None else None
    if value is None:
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
