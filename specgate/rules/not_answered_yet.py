"""The specification asks for something that the format allows and this version does not answer.

It is read, checked for its form, kept, and never approximated: a verdict that needs it is open, and what would only
qualify a verdict is said here so that nobody takes it for applied. The finding is a note; where a verdict is open
because of it, requirement-open says so with its own level.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.approximations.table import BY_RULE, LATER
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "not-answered-yet"


def check(facts: Facts) -> Iterator[Finding]:
    """Report what stays unanswered: requirement by requirement, then of the project."""
    for name, assessment in facts.assessments.items():
        for unanswered in assessment.unanswered:
            yield Finding(NAME, Level.NOTE, f"{name}: {unanswered.what}", unanswered.place, requirement=name)
    yield from _thresholds(facts)


def _thresholds(facts: Facts) -> Iterator[Finding]:
    """Report thresholds of names of the catalogue that have no row to apply them."""
    for name, stated in facts.project.approximations.items():
        for key, value in stated.items():
            if name in LATER or name in BY_RULE:
                message = f"{name}: the threshold `{key}` is kept, and not applied by this version"
                yield Finding(NAME, Level.NOTE, message, value.place)


RULE = Rule(NAME, "Not answered by this version", "note", check, __doc__)
