"""How to trust the report: what went in, what was used, how to get the same again, what was not shown."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence

from specgate.report.digits import number
from specgate.report.parts import shown
from specgate.report.words import counted, listed, spaced, with_unit
from specgate.review.types import AssumptionReview, InputReview, ParameterReview, Review, SubsystemReview
from specgate.terms.cautions import CAUTIONS
from specgate.terms.records import record


@record
class Parameter:
    """A parameter as used."""

    name: str
    value: str
    tolerance: str
    source: str
    place: str


@record
class Subsystem:
    """A subsystem as used; `channels` are its numerators over the one denominator, `late` the factor of a dead time."""

    name: str
    title: str
    owner: str
    model: str
    channels: tuple[tuple[str, str], ...]
    denominator: str
    late: str
    by_fit: bool
    used: bool
    claims: str
    """What the project says of the model."""


@record
class Definition:
    """The text of a measure, an approximation or a rule; `short` is what a printed report quotes."""

    name: str
    title: str
    text: str
    short: str
    source: str


@record
class Trust:
    """The section."""

    inputs: tuple[InputReview, ...]
    tool: str
    command: str
    policy: tuple[tuple[str, str], ...]
    proof: str
    units: str
    parameters: tuple[Parameter, ...]
    subsystems: tuple[Subsystem, ...]
    documents: tuple[tuple[str, str], ...]
    definitions: tuple[tuple[str, tuple[Definition, ...]], ...]


def trust(review: Review) -> Trust:
    """Return the section of a review."""
    return Trust(
        inputs=review.inputs,
        tool=f"{review.tool.name} {review.tool.version}, results format {review.format}",
        command=f"{review.tool.name} report PROJECT -o REPORT.pdf",
        policy=_policy(review),
        proof=_proof(review),
        units=", ".join(review.units),
        parameters=tuple(_parameter(name, p) for name, p in review.specification.parameters.items()),
        subsystems=tuple(_subsystem(name, s) for name, s in review.specification.subsystems.items()),
        documents=tuple(
            (name, ", ".join(f"{spaced(k)} {v}" if k != "title" else str(v) for k, v in words.items()))
            for name, words in review.specification.documents.items()
        ),
        definitions=_definitions(review),
    )


def _policy(review: Review) -> tuple[tuple[str, str], ...]:
    rows = [
        ("holds the gate", listed(spaced(item) for item in review.policy.hold_on) or "nothing but errors"),
        ("parameters", f"{spaced(review.policy.evaluate)} values"),
    ]
    rows += [
        ("changed threshold", ", ".join(f"{spaced(k)} {v}" for k, v in c.items()))
        for c in review.policy.changed_thresholds
    ]
    return tuple(rows)


def _proof(review: Review) -> str:
    """Return how many of the printed numbers are exact, enclosed, estimated."""
    proofs: Counter[str] = Counter()
    for loop in review.loops.values():
        groups = [
            loop.measures,
            *(r.measures for r in loop.responses.values()),
            *(b.measures for b in loop.breaks.values()),
        ]
        proofs.update(m.proof or "" for group in groups for m in group if m.value is not None or m.infinite)
    parts = [f"{proofs[kind]} {words}" for kind, words in _KINDS if proofs[kind]]
    return listed(parts) or "no measure has a value"


_KINDS = (
    ("exact", "exact (known as a rational number or as yes or no)"),
    ("enclosed", "enclosed (proved to lie within the bound printed beside them)"),
    ("estimated", "estimated (a numerical method without proof)"),
)


def _parameter(name: str, p: ParameterReview) -> Parameter:
    value = with_unit(number(p.value, 6), p.unit)
    written = f"{value} (written {p.as_written})" if p.as_written and p.as_written != value else value
    tolerance = p.tolerance or {}
    limits = tolerance.get("as_written") or " … ".join(tolerance[key] for key in ("lower", "upper") if key in tolerance)
    return Parameter(name, written, limits, p.source or "", f"{p.location.path}:{p.location.line}")


def _subsystem(name: str, s: SubsystemReview) -> Subsystem:
    channels = s.numerators if len(s.numerators) > 1 else {"": s.numerator}
    return Subsystem(
        name=name,
        title=s.title or "",
        owner=s.owner or "",
        model=s.model,
        channels=tuple((key, shown.polynomial(top)) for key, top in channels.items()),
        denominator=shown.polynomial(s.denominator),
        late="" if s.dead_time is None else shown.dead_time(s.dead_time),
        by_fit=s.by_fit,
        used=s.used,
        claims="; ".join(f"{spaced(key)}: {words}" for key, words in (s.model_claims or {}).items()),
    )


def _definitions(review: Review) -> tuple[tuple[str, tuple[Definition, ...]], ...]:
    kinds: dict[str, list[Definition]] = {}
    for name, d in review.definitions.items():
        kinds.setdefault(d.kind, []).append(Definition(name, d.title, d.text, d.summary or d.text, d.source or ""))
    headings = {"measure": "Measures", "approximation": "Approximations", "rule": "Rules"}
    order = [kind for kind in headings if kind in kinds] + [kind for kind in kinds if kind not in headings]
    return tuple((headings.get(kind, kind), tuple(kinds[kind])) for kind in order)


def cautions(review: Review) -> tuple[str, ...]:
    """Return what was not shown, and who decides."""
    own = []
    if review.policy.evaluate == "nominal":
        own.append("Parameters were taken at their nominal values; tolerances were not varied.")
    own += _ranges([a for r in review.requirements.values() for a in r.assumptions if isinstance(a, AssumptionReview)])
    unanswered = _unanswered(review)
    if unanswered:
        own.append(f"Not answered by this version, and open wherever a verdict needs it: {listed(unanswered)}.")
    later = sum(m.outcome == "due_later" for r in review.requirements.values() for m in r.methods)
    if later:
        own.append(
            f"{counted(later, 'verification')} due at a later stage {'has' if later == 1 else 'have'} not been judged."
        )
    return (*own, *CAUTIONS)


def _ranges(assumptions: Sequence[AssumptionReview]) -> list[str]:
    """Say what the ranges of the linear models leave open."""
    if not assumptions:
        return [
            "No range is stated for any signal that a verdict rests on: no size of an input is shown to be too large."
        ]
    beyond = {(a.response, a.subsystem, a.side, a.port, a.kind) for a in assumptions if a.holds is not True}
    if not beyond:
        return []
    are = "range is" if len(beyond) == 1 else "ranges are"
    return [
        f"{len(beyond)} {are} not kept, or not shown to be kept: verdicts there are verdicts on a linear model alone."
    ]


def _unanswered(review: Review) -> list[str]:
    found = [f for f in review.findings if f.rule == "not-answered-yet"]
    return list(dict.fromkeys(f.requirement or f.loop or f.subsystem or "" for f in found))
