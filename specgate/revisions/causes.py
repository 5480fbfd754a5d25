"""What a changed result rests on that was changed too; and where nothing was, that the tool or its method was.

A result rests on what its requirement lists (`rests_on`: parameters, subsystems, the response, break or loop), on the
wiring of that loop, on the thresholds of the approximations in its chain, on the documents that these name, and on its
own criterion; a verdict that is decided by other requirements rests on those.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator

from specgate.review.types import RequirementReview, Review
from specgate.revisions.pairs import Paired
from specgate.revisions.types import Change
from specgate.terms.records import record

_RESULT_ONLY = ("parameter", "subsystem", "loop", "response", "break")
_OF_THE_VERDICT = (": limit", ": basis")
_PROJECT_WIDE = ("date", "stage", "stages", "revision")


@record
class Causes:
    """Everything that was changed and bears on results, by what it is called in `rests_on`."""

    by_name: dict[str, tuple[str, ...]]
    own: dict[str, tuple[Change, ...]]
    thresholds: dict[str, str]
    project: tuple[str, ...]
    documents: dict[str, str]


@record
class Moved:
    """Ids of the requirements whose verdict, and of those whose verdict or values are others than before."""

    verdicts: frozenset[str]
    values: frozenset[str]


def causes(changes: Iterable[Change]) -> Causes:
    """Sort changes by what rests on them; those that bear on nothing are left out."""
    found = Causes({}, {}, {}, (), {})
    project: list[str] = []
    for one in changes:
        if not one.bears:
            continue
        key = f"{one.kind} {one.name}"
        if one.kind in _RESULT_ONLY:
            found.by_name[one.name] = tuple(dict.fromkeys((*found.by_name.get(one.name, ()), key)))
        elif one.kind in ("requirement", "criterion"):
            found.own[one.name] = (*found.own.get(one.name, ()), one)
        elif one.kind == "document":
            found.documents[one.name] = key
        elif one.kind == "policy" and one.name != "project":
            found.thresholds[one.name] = f"threshold of {one.name}"
        elif one.kind in ("project", "policy"):
            project.append(f"{one.kind} {one.what}")
    return Causes(found.by_name, found.own, found.thresholds, tuple(dict.fromkeys(project)), found.documents)


def of_values(found: Causes, pair: Paired, sides: tuple[RequirementReview, ...]) -> Iterator[str]:
    """Give what was changed under the values of a requirement, `sides` being the one or two that there are."""
    for name in dict.fromkeys(name for side in sides for name in side.rests_on):
        yield from found.by_name.get(name, ())
    subjects = dict.fromkeys(one.on for side in sides for one in side.criteria)
    for name in (*subjects, *dict.fromkeys(one.partition(".")[0] for one in subjects)):
        yield from found.by_name.get(name, ())
    yield from (_own(one) for one in found.own.get(pair.id, ()) if one.kind == "criterion" and _of_value(one))


def of_verdicts(found: Causes, pair: Paired, sides: tuple[RequirementReview, ...]) -> Iterator[str]:
    """Give what was changed under the verdict and the standing of a requirement, and not under its values."""
    own = found.own.get(pair.id, ())
    yield from (_own(one) for one in own if one.kind != "criterion" or not _of_value(one))
    chain = dict.fromkeys(name for side in sides for one in side.criteria for name in one.basis.chain)
    yield from (found.thresholds[name] for name in chain if name in found.thresholds)


def from_below(pair: Paired, sides: tuple[RequirementReview, ...], moved: Moved) -> Iterator[str]:
    """Give the requirements that stand otherwise than before and on which this one rests."""
    decide = (name for side in sides for name in _children(side) if name in moved.verdicts)
    enter = (name for side in sides for name in side.rests_on if name in moved.values)
    for name in dict.fromkeys((*decide, *enter)):
        if name not in (pair.old, pair.new):
            yield f"requirement {name}"
    if len({tuple(sorted(_children(side))) for side in sides}) > 1:
        yield "what is derived from it"


def _children(side: RequirementReview) -> tuple[str, ...]:
    return side.derived if side.decided_by == "derived" else ()


def project_wide(found: Causes) -> tuple[str, ...]:
    """Return the changes of the title block and the policy on which any verdict may rest."""
    return found.project


def _of_value(change: Change) -> bool:
    """Tell whether a change of a criterion moves its value: of a limit, only one to another quantity."""
    return (change.how == "changed" and change.what.endswith(": limit")) or not change.what.endswith(_OF_THE_VERDICT)


def _own(change: Change) -> str:
    words = change.what or "the requirement"
    return f"its {words}" if change.what else words


# --- documents ------------------------------------------------------------------------------------------------


def touched(found: Causes, old: Review, new: Review) -> dict[str, tuple[str, ...]]:
    """Return for every requirement the changed documents that it rests on.

    One that comes from a document, and everything derived from that; one that rests on a parameter whose source, or on
    a record whose text, names it.
    """
    named: dict[str, dict[str, None]] = {}
    for review in (old, new):
        for name, one in review.requirements.items():
            for document in found.documents:
                if one.external is not None and one.external.get("document") == document:
                    for each in _below(name, review):
                        named.setdefault(each, {})[document] = None
                elif _names(document, one, review):
                    named.setdefault(name, {})[document] = None
    return {name: tuple(sorted(documents)) for name, documents in named.items()}


def _names(document: str, one: RequirementReview, review: Review) -> bool:
    """Tell whether a requirement rests on a parameter or a record that names a document."""
    parameters = review.specification.parameters
    texts = [parameters[name].source or "" for name in one.rests_on if name in parameters]
    texts += [text for record in one.evidence for text in (record.id, record.title or "", record.source or "")]
    pattern = re.compile(rf"(?<![\w-]){re.escape(document)}(?![\w-])")
    return any(document in text and pattern.search(text) for text in texts)


def _below(name: str, review: Review) -> Iterator[str]:
    """Give a requirement and all that is derived from it, however far down."""
    seen = {name}
    waiting = [name]
    while waiting:
        here = waiting.pop()
        yield here
        one = review.requirements.get(here)
        fresh = [each for each in (one.derived if one else ()) if each not in seen]
        seen.update(fresh)
        waiting += fresh
