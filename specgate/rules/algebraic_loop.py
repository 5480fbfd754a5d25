"""Signals feed each other at once, without any lag, so that their equations do not determine them.

Nothing that depends on them has an answer: requirements on such responses are open. Put it right by giving the
block that passes its input straight on the lag that it has in truth. A loop that is determined and yet passes its
signals on at once, with a gain of one or more, is a warning: any delay in it, however short, makes it unstable.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.analysis.analyses import LoopAnalysis
from specgate.compliance.wording import number
from specgate.rules.rule import Facts, Rule
from specgate.terms.enclosed import printed_exact
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "algebraic-loop"


def check(facts: Facts) -> Iterator[Finding]:
    """Report loops that are not determined, and those that any delay destabilises."""
    for loop in facts.analyses.loops.values():
        found = loop.solution.algebraic_loop
        if found is not None:
            message = f"{loop.loop.name}: {found.reason}; give one of the blocks between them the lag that it has"
            yield _finding(loop, Level.ERROR, message, found.signals)
        else:
            yield from _strong(loop)
            yield from _left_open(loop)


def _strong(loop: LoopAnalysis) -> Iterator[Finding]:
    for strong in loop.solution.strong_feed_through:
        gain = "an infinite gain" if strong.gain is None else f"a gain of {number(printed_exact(strong.gain).value)}"
        message = (
            f"{loop.loop.name}: {', '.join(strong.signals)} feed each other at once with {gain}: any delay, however "
            "short, makes this unstable; give one of the blocks the lag that it has"
        )
        yield _finding(loop, Level.WARNING, message, strong.signals)


def _left_open(loop: LoopAnalysis) -> Iterator[Finding]:
    opened = (one.opened for one in loop.breaks.values() if one.opened is not None)
    reasons = (one.algebraic_loop.reason for one in opened if one.algebraic_loop is not None)
    for reason in dict.fromkeys(reasons):
        yield _finding(loop, Level.WARNING, f"{loop.loop.name}: {reason}", ())


def _finding(loop: LoopAnalysis, level: Level, message: str, signals: tuple[str, ...]) -> Finding:
    declared = loop.loop.signals
    place = next((declared[name].place for name in signals if name in declared), loop.loop.place)
    return Finding(NAME, level, message, place, loop=loop.loop.name)


RULE = Rule(NAME, "Algebraic loop", "error; warning where any delay destabilises", check, __doc__)
