"""A link points to nothing: what it names is not in the specification.

`derived_from` and the shares of a `budget` name requirements, as evidence and waivers do; `allocated_to` names a loop
or a subsystem. Put it right by correcting the name, or by adding what it names. A requirement that comes from a
document outside the project says so with `external`.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from specgate.project.types import Evidence, Waiver
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.names import nearest
from specgate.terms.places import Place
from specgate.terms.verdicts import Level

NAME = "dangling-link"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every link to something that the specification does not hold."""
    requirements = facts.project.requirements
    for link in facts.graph.dangling:
        derived = link.kind == "derived_from"
        known = list(requirements) if derived else [*facts.project.loops, *facts.project.subsystems]
        wanted = "no requirement" if derived else "neither a loop nor a subsystem"
        remedy = _remedy(link.link.id, known, f"add it, or take it out of {link.kind}")
        message = f"{link.requirement}: {link.link.id} in {link.kind} is {wanted} of this project; {remedy}"
        yield _finding(message, link.link.place, link.requirement)
    for name, requirement in requirements.items():
        for share in requirement.budget.shares if requirement.budget is not None else ():
            if share.id not in requirements:
                remedy = _remedy(share.id, requirements, "add it, or take it out of the budget")
                message = f"{name}: {share.id} in its budget is no requirement of this project; {remedy}"
                yield _finding(message, share.place, name)
    yield from _records("evidence", facts.project.evidence.values(), requirements)
    yield from _records("waiver", facts.project.waivers.values(), requirements)


def _records(what: str, records: Iterable[Evidence | Waiver], requirements: Iterable[str]) -> Iterator[Finding]:
    known = dict.fromkeys(requirements)
    for record in records:
        for name in record.requirements:
            if name not in known:
                remedy = _remedy(name, known, "correct the name, or add the requirement")
                message = f"the {what} {record.id} names {name}, which is no requirement of this project; {remedy}"
                yield _finding(message, record.place, None)


def _remedy(name: str, known: Iterable[str], otherwise: str) -> str:
    close = nearest(name, known)
    return f"did you mean {close}?" if close else otherwise


def _finding(message: str, place: Place, requirement: str | None) -> Finding:
    return Finding(rule=NAME, level=Level.ERROR, message=message, place=place, requirement=requirement)


RULE = Rule(NAME, "Link to nothing", "error", check, __doc__)
