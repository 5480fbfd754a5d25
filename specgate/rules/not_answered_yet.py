"""The specification asks for something that the format allows and this version does not answer.

It is read, checked for its form, kept, and never approximated: a verdict that needs it is open, and what would only
qualify a verdict (a waiver, a linear range) is said here so that nobody takes it for applied. The finding is a
note; where a verdict is open because of it, requirement-open says so with its own level.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.approximations.table import LATER
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "not-answered-yet"
_POLICIES = ("decision_rule", "model_agreement")


def check(facts: Facts) -> Iterator[Finding]:
    """Report what stays unanswered: requirement by requirement, then of the subsystems and of the project."""
    for name, assessment in facts.assessments.items():
        for unanswered in assessment.unanswered:
            yield Finding(NAME, Level.NOTE, f"{name}: {unanswered.what}", unanswered.place, requirement=name)
    for name, subsystem in facts.project.subsystems.items():
        if subsystem.kept:
            message = f"{name}: {', '.join(subsystem.kept)}: kept, and not audited by this version"
            yield Finding(NAME, Level.NOTE, message, subsystem.place, subsystem=name)
    yield from _ranges(facts)
    yield from _thresholds(facts)
    for name in _POLICIES:
        for kept in facts.project.kept.get(name, ()):
            yield Finding(NAME, Level.NOTE, f"{name}: kept, and not applied by this version", kept.place)


def _thresholds(facts: Facts) -> Iterator[Finding]:
    """Report thresholds of approximations that are not audited yet."""
    for name, stated in facts.project.approximations.items():
        for key, value in stated.items():
            if name in LATER:
                message = f"{name}: the threshold `{key}` is kept, and not applied by this version"
                yield Finding(NAME, Level.NOTE, message, value.place)


def _ranges(facts: Facts) -> Iterator[Finding]:
    """Report the ranges of signals, one note for the project."""
    blocks = facts.project.subsystems.values()
    ports = [port for block in blocks for port in (*block.inputs.values(), *block.outputs.values())]
    stated = [port for port in ports if port.linear_range is not None or port.rate_range is not None]
    if stated:
        signals = "1 signal has a" if len(stated) == 1 else f"{len(stated)} signals have a"
        message = (
            f"{signals} linear_range or rate_range, not checked by this version: the verdicts hold as long as the "
            "signals stay inside"
        )
        yield Finding(NAME, Level.NOTE, message, min(port.place for port in stated))


RULE = Rule(NAME, "Not answered by this version", "note", check, __doc__)
