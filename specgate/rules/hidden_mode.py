"""A mode of the loop does not show in a response.

A zero cancels a pole on the way from the input to the signal. The mode decays, so that the response is what it
seems, until a tolerance moves the pole off the zero: then a slow tail or a ripple comes back (a note). A mode that
does not decay and lies outside every path and cycle that the response meets does not touch it (a display that
integrates, hung on a signal): that is a warning, since the mode is in the hardware all the same.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.analysis.analyses import LoopAnalysis, ResponseAnalysis
from specgate.compliance.ruling import listed
from specgate.compliance.wording import hides, modes
from specgate.rules.rule import Facts, Rule
from specgate.systems.delayed import DelayedChannel, DelayedComponent
from specgate.systems.solution import Channel, Component
from specgate.terms.findings import Finding, Related
from specgate.terms.records import record
from specgate.terms.verdicts import Level

NAME = "hidden-mode"


@record
class _Seen:
    """What is to be said of a mode and one response; `several` says the same of all responses with the same mode."""

    response: ResponseAnalysis
    level: Level
    alone: str
    several: str


def check(facts: Facts) -> Iterator[Finding]:
    """Report decaying modes that responses hide, and unstable ones beside their paths; each mode of a loop once."""
    for loop in facts.analyses.loops.values():
        same: dict[str, list[_Seen]] = {}
        for response in loop.responses.values():
            for channel in response.channels:
                for seen in _seen(f"{loop.loop.name}.{response.response.name}", response, channel):
                    same.setdefault(seen.several, []).append(seen)
        for group in same.values():
            yield _finding(loop, list({id(seen.response): seen for seen in group}.values()))


def _seen(name: str, response: ResponseAnalysis, channel: Channel | DelayedChannel) -> Iterator[_Seen]:
    if hides(channel) and channel.hides_instability is False:
        hidden = modes(channel.hidden)
        ending = "it decays, and comes back where a tolerance moves it off the zero"
        yield _Seen(
            response,
            Level.NOTE,
            f"{name} does not show {hidden}, which a zero cancels on the way from {channel.source} to "
            f"{channel.target}; {ending}",
            f"do not show {hidden}, which a zero cancels on the way; {ending}",
        )
    for component in channel.unstable_not_leading:
        driven = f"{_where(component)}, where {modes(component.modes)} does not decay"
        yield _Seen(
            response,
            Level.WARNING,
            f"{name} drives {driven}; it does not act on {channel.target} and does not show there",
            f"drive {driven}; it does not act on the signals that are looked at and does not show there",
        )
    for component in channel.unstable_not_reached:
        left = f"what does not decay in {_where(component)} ({modes(component.modes)})"
        yield _Seen(
            response,
            Level.WARNING,
            f"{name} is not started by {left}, and that acts on {channel.target} all the same",
            f"are not started by {left}, and that acts on the signals that are looked at all the same",
        )


def _where(component: Component | DelayedComponent) -> str:
    return ", ".join(component.signals or component.instances)


def _finding(loop: LoopAnalysis, group: list[_Seen]) -> Finding:
    first, *others = group
    names = [f"{loop.loop.name}.{seen.response.response.name}" for seen in group]
    declared = first.response.response
    return Finding(
        NAME,
        first.level,
        f"{listed(names)} {first.several}" if others else first.alone,
        declared.place,
        loop=loop.loop.name,
        response=None if others else declared.name,
        related=tuple(Related(seen.response.response.place, "of this response too") for seen in others),
    )


RULE = Rule(NAME, "Hidden mode", "note; warning where it does not decay", check, __doc__)
