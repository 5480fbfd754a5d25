"""A requirement comes from a document that the register does not hold.

In a project that has a register (`documents`), the document under `external` is one of it, with its title and issue;
else nobody can tell which text was meant. Put it right by correcting the number, or by adding the document.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.names import nearest
from specgate.terms.verdicts import Level

NAME = "document-unregistered"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every external requirement whose document the register lacks."""
    register = facts.project.documents
    for name, requirement in facts.project.requirements.items() if register else ():
        document = str((requirement.external or {}).get("document", ""))
        if requirement.external is not None and document not in register:
            close = nearest(document, register)
            remedy = f"did you mean {close}?" if close else "add it to `documents` with its issue"
            message = f"{name} comes from {document}, which is not in the register; {remedy}"
            yield Finding(NAME, Level.WARNING, message, requirement.place, requirement=name)


RULE = Rule(NAME, "Document that is not in the register", "warning", check, __doc__)
