"""The links of a chain of approximations, each with the response that it is read from, and their accuracy together.

An approximation that drops a part of the response leaves the rest to what follows it. One that a later link builds on
(a premise) is no link of its own: its conditions and its share of the accuracy belong to that later one.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation
from specgate.approximations.crowding import outward, signed_percent
from specgate.approximations.features import Features
from specgate.approximations.table import chain, entry
from specgate.approximations.viewed import Viewed
from specgate.measures.measure import Arguments
from specgate.project.types import Basis
from specgate.response.answers import Absent, Answer
from specgate.terms.records import record
from specgate.terms.verdicts import Proof


@record
class Link:
    """An approximation and what it is read from.

    viewed, again: with the fixed decimal for pi and with more digits (the same object where pi has no part in it).
    """

    row: Approximation
    viewed: Viewed
    again: Viewed


@record
class Linked:
    """A chain against a response. nothing: why its last link has nothing to be read from; the links stop before it."""

    row: Approximation
    links: tuple[Link, ...]
    nothing: Absent | None = None

    def formula(self, arguments: Arguments) -> Answer:
        """Return the value of the last formula, on what the links before it have left."""
        if self.nothing is not None:
            return Answer(Proof.EXACT if self.nothing.proved else Proof.ESTIMATED, absent=self.nothing)
        return self.row.evaluate(self.links[-1].viewed, arguments)

    def accuracy(self, arguments: Arguments) -> Accuracy | None:
        """Return the stated accuracy of all links together; None where one of them states none."""
        if self.nothing is not None:
            return None
        return together([link.row.accuracy(link.viewed, arguments) for link in self.links])


def linked(basis: Basis, viewed: Viewed, again: Viewed, arguments: Arguments) -> Linked:
    """Return the links of a basis. Raises KeyError for a name or a variant that is not in the table."""
    last = entry(basis.chain[-1], basis.variant)
    rows = [*(entry(name) for name in basis.chain[:-1]), last]
    links: list[Link] = []
    for place, row in enumerate(rows[:-1]):
        if row.reduce is None or any(row in chain(other.name) for other in rows[place + 1 :]):
            continue
        links.append(Link(row, viewed, again))
        left, left_again = _left(row, viewed, again, arguments)
        if isinstance(left, Absent) or isinstance(left_again, Absent):
            reason = left if isinstance(left, Absent) else left_again
            assert isinstance(reason, Absent)
            return Linked(last, tuple(links), reason)
        viewed, again = left, left_again
    return Linked(last, (*links, Link(last, viewed, again)))


def _left(
    row: Approximation, viewed: Viewed, again: Viewed, arguments: Arguments
) -> tuple[Features | Absent, Features | Absent]:
    """Return what a link leaves of a response; that it is one is seen to where the basis is read."""
    assert row.reduce is not None
    assert isinstance(viewed, Features)
    assert isinstance(again, Features)
    left = row.reduce(viewed, arguments)
    return left, left if again is viewed else row.reduce(again, arguments)


def together(parts: Sequence[Accuracy | None]) -> Accuracy | None:
    """Return the accuracy of estimates read from one another: their errors multiply. None where one states none."""
    stated = [part for part in parts if part is not None]
    if len(stated) < len(parts) or not stated:
        return None
    if len(stated) == 1:
        return stated[0]
    low, high = fmpq(1), fmpq(1)
    for part in stated:
        low, high = low * (1 + part.lower), high * (1 + part.upper)
    lower, upper = outward(low - 1, high - 1)
    each = "; then ".join(part.text for part in stated)
    return Accuracy(lower, upper, f"{each}; together {signed_percent(lower)} to {signed_percent(upper)} %")
