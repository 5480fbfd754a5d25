"""One document is used in two issues.

A requirement that comes from issue 2 of a document and a value that is taken from issue 3 of it do not belong to one
design. Issues are read from the register (`documents`), from `external: {document, issue}`, and from sources that name
one: `source: "GH-ICD-002, table 5, issue 3"`, the number of the document first. Where the register holds the document
its issue is the one that counts, else that of the first use. Put it right by reading what changed between the issues
and going over to one of them.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from specgate.analysis.reads import literals
from specgate.project.parameters import parameters
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.verdicts import Level

NAME = "document-issues-differ"
_DOCUMENT = re.compile(r"\s*(?P<document>[A-Za-z0-9][^\s,;]*)")
_ISSUE = re.compile(r"\b(?:issue|iss\.|revision|rev\.)\s+(?P<issue>\w+(?:\.\w+)*)", re.IGNORECASE)


@record
class _Use:
    """Who uses a document in which issue, and where that is written."""

    document: str
    issue: str
    who: str
    place: Place
    requirement: str | None = None


def check(facts: Facts) -> Iterator[Finding]:
    """Report every use of a document in another issue than the one that counts."""
    counts: dict[str, _Use] = {}
    for use in _uses(facts):
        first = counts.setdefault(use.document, use)
        if first.issue.casefold() != use.issue.casefold():
            message = (
                f"{use.who} is from issue {use.issue} of {use.document}, {first.who} is of issue {first.issue}: "
                "see what changed between them, and go over to one"
            )
            there = Related(first.place, f"issue {first.issue}")
            yield Finding(NAME, Level.ERROR, message, use.place, requirement=use.requirement, related=(there,))


def _uses(facts: Facts) -> Iterator[_Use]:
    """Give the register, then the requirements, then the values, then the records."""
    project = facts.project
    for name, document in project.documents.items():
        if document.content.get("issue") is not None:
            yield _Use(name, str(document.content["issue"]), "the register", document.place)
    for name, requirement in project.requirements.items():
        external = requirement.external or {}
        if external.get("issue") is not None:
            yield _Use(str(external.get("document")), str(external["issue"]), name, requirement.place, name)
    for name, (parameter, _) in parameters(project).items():
        yield from _named(parameter.value.source, name, parameter.place)
    for subsystem in project.subsystems.values():
        for value in literals(subsystem):
            yield from _named(value.source, f"`{value.as_written}` of {subsystem.name}", value.place)
    for evidence in project.evidence.values():
        yield from _named(evidence.source, f"the evidence {evidence.id}", evidence.place)


def _named(source: str | None, who: str, place: Place) -> Iterator[_Use]:
    """Give the documents of a source: each begins with its number, several are parted by `;`."""
    for part in (source or "").split(";"):
        document, issue = _DOCUMENT.match(part), _ISSUE.search(part)
        if document is not None and issue is not None and any(map(str.isdigit, document["document"])):
            yield _Use(document["document"], issue["issue"], who, place)


RULE = Rule(NAME, "One document in two issues", "error", check, __doc__)
