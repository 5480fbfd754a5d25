"""Requirements are derived from one another in a circle, so that none of them can be decided.

Every member is open until one of the `derived_from` links is taken out. One finding for each circle, at its first
member; the other links are shown beside it.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level

NAME = "derivation-cycle"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every circle of derivations once."""
    for cycle in facts.graph.cycles:
        links = [
            (name, link) for name in cycle for link in facts.project.requirements[name].derived_from if link.id in cycle
        ]
        yield Finding(
            rule=NAME,
            level=Level.ERROR,
            message=(
                f"{', '.join(cycle)} {'are derived from one another' if len(cycle) > 1 else 'is derived from itself'}: "
                "take out the link that points from the need to what serves it"
            ),
            place=links[0][1].place,
            requirement=cycle[0],
            related=tuple(Related(link.place, f"{name} is derived from {link.id}") for name, link in links[1:]),
        )


RULE = Rule(NAME, "Derivation in a circle", "error", check, __doc__)
