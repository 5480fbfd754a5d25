"""A baseline: what the links of a specification stood on when it was frozen, and which of them are stale since.

A link from a child to a parent is stale if the parent says something else now than when the link was last affirmed,
while the child says what it said then, and nobody has affirmed the link since. What a requirement says is its digest:
of its text with blanks made equal, its limits, measures and arguments as exact values in coherent SI (`1.2 s` and
`1200 ms` are one), its budget, what decides it, whether it applies, and the document that it comes from with the issue
and the date of that. Title, rationale, owner, methods, evidence and the basis of a claim are not part of it: they say
nothing that a child could have to follow.
"""

from __future__ import annotations

import dataclasses
import hashlib
import json
from collections.abc import Mapping
from typing import Any

from specgate.project.faults import Fault
from specgate.project.parameters import Values, evaluate
from specgate.project.types import Link, Project, Requirement, Value
from specgate.terms.expressions import ExpressionError
from specgate.terms.places import Place
from specgate.terms.records import record

_SAYS = ("decided_by", "criteria", "budget", "not_applicable", "external")
_SILENT = frozenset({"basis", "place", "source", "kept"})


@record
class Affirmed:
    """What a link stood on: digests of parent and child, and who had re-affirmed it, in words (None: nobody)."""

    parent: str
    child: str
    reaffirmed: str | None


Baseline = Mapping[str, Mapping[str, Affirmed]]
"""The links of a baseline, by child and parent."""


@record
class Stale:
    """A link that is stale."""

    child: str
    parent: str
    link: Link


def frozen(project: Project, values: Values, before: Baseline | None = None) -> Baseline:
    """Freeze the links of a project; those that are stale since an earlier baseline stay as they stood in that."""
    digests = _digests(project, values)
    kept = {(one.child, one.parent) for one in stale(project, values, before)} if before else set()
    return {
        name: {
            link.id: before[name][link.id]
            if before and (name, link.id) in kept
            else Affirmed(digests[link.id], digests[name], reaffirmation(link))
            for link in requirement.derived_from
            if link.id in digests
        }
        for name, requirement in project.requirements.items()
        if any(link.id in digests for link in requirement.derived_from)
    }


def stale(project: Project, values: Values, baseline: Baseline) -> tuple[Stale, ...]:
    """Return the links that are stale since a baseline, in the order of the files."""
    digests = _digests(project, values)
    return tuple(
        Stale(name, link.id, link)
        for name, requirement in project.requirements.items()
        for link in requirement.derived_from
        if _is_stale(link, baseline.get(name, {}).get(link.id), digests.get(link.id), digests[name])
    )


def _is_stale(link: Link, affirmed: Affirmed | None, parent: str | None, child: str) -> bool:
    if affirmed is None or parent is None:
        return False
    return affirmed.parent != parent and affirmed.child == child and affirmed.reaffirmed == reaffirmation(link)


def reaffirmation(link: Link) -> str | None:
    """Return who re-affirmed a link and when, in words."""
    said = link.kept.get("reaffirmed")
    if not isinstance(said, Mapping):
        return None
    return ", ".join(f"{key} {value}" for key, value in sorted(said.items()))


# --- what a requirement says ----------------------------------------------------------------------------------


def _digests(project: Project, values: Values) -> dict[str, str]:
    return {name: digest(one, project, values) for name, one in project.requirements.items()}


def digest(requirement: Requirement, project: Project, values: Values) -> str:
    """Return the SHA-256 of what a requirement says, in hexadecimal digits."""
    says: dict[str, Any] = {name: _plain(getattr(requirement, name), values) for name in _SAYS}
    says["text"] = " ".join(requirement.text.split())
    says["criteria"] = sorted(map(_written, says["criteria"]))
    document = project.documents.get(str((requirement.external or {}).get("document")))
    if document is not None:
        says["issue"] = [str(document.content.get(key)) for key in ("issue", "date")]
    return hashlib.sha256(_written(says).encode()).hexdigest()


def _written(tree: Any) -> str:
    return json.dumps(tree, sort_keys=True, ensure_ascii=False)


def _plain(node: Any, values: Values) -> Any:
    """Return a part of a specification without the places and the manner in which it is written."""
    if isinstance(node, Value):
        return _number(node, values)
    if isinstance(node, Mapping):
        return {str(key): _plain(part, values) for key, part in node.items()}
    if isinstance(node, tuple | list):
        return [_plain(part, values) for part in node]
    if dataclasses.is_dataclass(node) and not isinstance(node, Place):
        named = ((one.name, getattr(node, one.name)) for one in dataclasses.fields(node))
        return {name: _plain(part, values) for name, part in named if name not in _SILENT}
    return node if node is None or isinstance(node, bool | int) else " ".join(str(node).split())


def _number(value: Value, values: Values) -> str:
    """Return an exact value in coherent SI; what has none without its subject, such as `2 %`, as it is written."""
    try:
        return str(evaluate(value, values))
    except (ExpressionError, Fault, KeyError):
        return " ".join(value.as_written.split())
