"""A requirement follows a parent that says something else since the baseline, and nobody has looked at the link.

Asked only with a baseline (`check --baseline FILE`, written by `freeze`). A link is stale if the text, the limits, the
budget or the document of the parent is another than when the baseline was frozen, while the child says what it said
then. Put it right by changing the child, or, where it still serves what the parent now says, by re-affirming the link
in the files: `derived_from: [{id: PARENT, reaffirmed: {by: ROLE, on: DATE}}]`. A re-affirmation counts once: when the
parent changes again after the next baseline, a new one is asked for.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level
from specgate.traceability.baseline import stale

NAME = "link-stale"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every stale link, with the parent beside it."""
    if facts.baseline is None:
        return
    for one in stale(facts.project, facts.analyses.nominal.values, facts.baseline):
        parent = facts.project.requirements[one.parent]
        yield Finding(
            rule=NAME,
            level=Level.ERROR,
            message=f"{one.child} is derived from {one.parent}, which was changed since the baseline: change "
            f"{one.child} too, or re-affirm the link (reaffirmed: {{by, on}})",
            place=one.link.place,
            requirement=one.child,
            related=(Related(parent.place, f"{one.parent}, changed since the baseline"),),
        )


RULE = Rule(NAME, "Link to a parent that changed", "error", check, __doc__)
