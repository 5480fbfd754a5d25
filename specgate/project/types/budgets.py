"""Budgets: a limit that is shared among requirements, or the phase at a frequency among blocks."""

from __future__ import annotations

from dataclasses import field
from typing import Literal

from flint import fmpq

from specgate.project.types.criteria import Limit
from specgate.project.types.records import Aim
from specgate.project.types.values import Value
from specgate.terms.places import Place
from specgate.terms.records import record

Combination = Literal["sum", "root_sum_square", "maximum", "minimum", "product"]


@record
class Share:
    """A requirement that takes a share, times a factor (its sign included).

    level: multiples of the standard deviation that its limit stands for. mean: it adds linearly whatever else does.
    group: shares of one group are correlated and add linearly among themselves.
    """

    id: str
    place: Place
    factor: fmpq = fmpq(1)
    level: fmpq | None = None
    mean: bool = False
    group: str | None = None
    aim: Aim = field(default_factory=Aim)


@record
class BlockShare:
    """A block whose phase counts, with what it may take."""

    subsystem: str
    share: Value | None
    place: Place


@record
class Budget:
    """How shares together make what is limited. limit: the budget's own; None where the requirement has a criterion.

    frequency, blocks: of a budget of phases. reserve: kept back, relative (unit %) to the limit or absolute.
    """

    combine: Combination
    place: Place
    shares: tuple[Share, ...] = ()
    blocks: tuple[BlockShare, ...] = ()
    frequency: Value | None = None
    level: fmpq | None = None
    reserve: Value | None = None
    limit: Limit | None = None
