"""A mode of the loop does not show in a response.

A zero cancels a pole on the way from the input to the signal. The mode decays, so that the response is what it
seems, until a tolerance moves the pole off the zero: then a slow tail or a ripple comes back (a note). A mode that
does not decay and lies outside every path and cycle that the response meets does not touch it (a display that
integrates, hung on a signal): that is a warning, since the mode is in the hardware all the same.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.analysis.analyses import LoopAnalysis, ResponseAnalysis
from specgate.compliance.wording import hides, modes
from specgate.rules.rule import Facts, Rule
from specgate.systems.delayed import DelayedChannel, DelayedComponent
from specgate.systems.solution import Channel, Component
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "hidden-mode"


def check(facts: Facts) -> Iterator[Finding]:
    """Report decaying modes that a response hides, and unstable ones beside its path."""
    for loop in facts.analyses.loops.values():
        for response in loop.responses.values():
            for channel in response.channels:
                yield from _of_response(loop, response, channel)


def _of_response(
    loop: LoopAnalysis, response: ResponseAnalysis, channel: Channel | DelayedChannel
) -> Iterator[Finding]:
    name = f"{loop.loop.name}.{response.response.name}"
    if hides(channel) and channel.hides_instability is False:
        message = (
            f"{name} does not show {modes(channel.hidden)}, which a zero cancels on the way from {channel.source} to "
            f"{channel.target}; it decays, and comes back where a tolerance moves it off the zero"
        )
        yield _finding(loop, response, Level.NOTE, message)
    for component in channel.unstable_not_leading:
        message = (
            f"{name} drives {_where(component)}, where {modes(component.modes)} does not decay; it does not act on "
            f"{channel.target} and does not show there"
        )
        yield _finding(loop, response, Level.WARNING, message)
    for component in channel.unstable_not_reached:
        message = (
            f"{name} is not started by what does not decay in {_where(component)} ({modes(component.modes)}), and that "
            f"acts on {channel.target} all the same"
        )
        yield _finding(loop, response, Level.WARNING, message)


def _where(component: Component | DelayedComponent) -> str:
    return ", ".join(component.signals or component.instances)


def _finding(loop: LoopAnalysis, response: ResponseAnalysis, level: Level, message: str) -> Finding:
    declared = response.response
    return Finding(NAME, level, message, declared.place, loop=loop.loop.name, response=declared.name)


RULE = Rule(NAME, "Hidden mode", "note; warning where it does not decay", check, __doc__)
