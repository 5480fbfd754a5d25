"""A mode that does not decay is hidden inside a response: it cancels on paper and grows in the hardware.

The transfer function from input to signal is smooth, since a zero lies exactly on the pole; but the mode is there,
on the way from the input to the signal or in a cycle that the response meets, and any disturbance starts it. No
measure over time is read from such a response, and requirements on it are not met. Put it right by changing the
design so that the mode is fed back: a controller must not cancel an unstable pole or an integrator of the plant
with a zero of its own.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.wording import modes
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "hidden-unstable-mode"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every response that hides a mode which does not decay."""
    for loop in facts.analyses.loops.values():
        for name, response in loop.responses.items():
            for channel in (one for one in response.channels if one.hides_instability):
                signals = dict.fromkeys(s for one in channel.components if one.stable is False for s in one.signals)
                yield Finding(
                    rule=NAME,
                    level=Level.ERROR,
                    message=(
                        f"{loop.loop.name}.{name} hides {modes(channel.hidden)} on the way from {channel.source} to "
                        f"{channel.target}"
                        + (f" (in {', '.join(signals)})" if signals else "")
                        + ": it does not decay "
                        "and no measure shows it; change the design so that it is fed back"
                    ),
                    place=response.response.place,
                    loop=loop.loop.name,
                    response=name,
                )


RULE = Rule(NAME, "Hidden mode that does not decay", "error", check, __doc__)
