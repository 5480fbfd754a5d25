"""The project loosens a threshold of the catalogue, so that a formula counts as in range where nothing is shown for it.

A project may set thresholds of its own, under `approximations`. A tighter one is its own business. With a looser one
more loops are taken for being in the formula's range, and for those no accuracy has been shown: a claim that stands
only because of it is inconclusive, never sound. The finding keeps the change in the open. Put it right by going back
to the catalogue's threshold, or let the review accept it.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.thresholds import Threshold, policy
from specgate.compliance.wording import number
from specgate.rules.rule import Facts, Rule
from specgate.terms.enclosed import printed_exact
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "threshold-loosened"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every threshold that the project has loosened."""
    for one in policy(facts.project, facts.analyses.nominal.values).stated:
        if one.looser:
            yield Finding(NAME, Level.WARNING, _message(one), one.place)


def _message(one: Threshold) -> str:
    catalogue = number(printed_exact(one.catalogue).value)
    return (
        f"{one.approximation}: the threshold `{one.key}` is loosened from {catalogue} to {one.as_written}, and no "
        f"accuracy is stated for what only that lets in: go back to {catalogue}, or have the review accept it"
    )


RULE = Rule(NAME, "Threshold loosened", "warning", check, __doc__)
