"""A unit: its size in coherent SI, its dimension, and what else decides where it may stand."""

from __future__ import annotations

from typing import Literal

from flint import fmpq

from specgate.terms.decimals import exact_decimal
from specgate.terms.dimensions import DIMENSIONLESS, RATE, Dimension
from specgate.terms.records import record

PI = exact_decimal("3.14159265358979323846264338327950288419716939937510582097494")
"""pi as one fixed decimal of 60 digits, the same everywhere, so that what cancels on paper cancels here."""
PRECISE_PI = exact_decimal(
    "3.141592653589793238462643383279502884197169399375105820974944592307816406286208998628034825342117068"
)
"""pi to 100 digits: an answer that differs from the one with PI hangs on the digits of pi."""

Kind = Literal["linear", "decibel", "temperature_difference", "percent", "points"]


@record
class Unit:
    """symbol as written; factor * pi**pi_power is its size in coherent SI.

    angle:  power of plane angle that it carries (rad/s: 1), although an angle has no dimension.
    cycles: it counts whole turns (Hz, rpm, rev), which are exactly 2 pi rad each.
    kind:   `decibel` is an amplitude ratio, 20 log10, and has no factor; `percent` needs to say of what;
            `points` are percentage points; `temperature_difference` is a lone K or degC.
    zero:   where the unit's own scale starts, in coherent SI (degC: 273.15), for absolute values only.
    """

    symbol: str
    factor: fmpq
    pi_power: int = 0
    dimension: Dimension = DIMENSIONLESS
    angle: int = 0
    cycles: bool = False
    kind: Kind = "linear"
    zero: fmpq = fmpq(0)

    @property
    def si_factor(self) -> fmpq:
        """Size in coherent SI with pi replaced by PI."""
        return self.factor_with(PI)

    def factor_with(self, pi: fmpq) -> fmpq:
        """Size in coherent SI with pi replaced by the given rational."""
        return self.factor * pi**self.pi_power

    @property
    def frequency(self) -> bool:
        """Whether it measures an angular frequency: rad/s, Hz, rpm, deg/s."""
        return self.dimension == RATE and self.angle == 1

    def __mul__(self, other: Unit) -> Unit:
        symbols = [_bracketed(unit.symbol, "/") for unit in (self, other) if unit.symbol != "1"]
        return _combined(self, other, 1, "*".join(symbols) or "1")

    def __truediv__(self, other: Unit) -> Unit:
        symbol = self.symbol if other.symbol == "1" else f"{self.symbol}/{_bracketed(other.symbol, '*/')}"
        return _combined(self, other, -1, symbol)

    def __pow__(self, power: int) -> Unit:
        return Unit(
            f"{_bracketed(self.symbol, '*/^')}^{power}",
            self.factor**power,
            self.pi_power * power,
            self.dimension**power,
            self.angle * power,
            self.cycles,
        )


ONE = Unit("1", fmpq(1))
"""The unit of a plain number."""


def frequency_problem(unit: Unit) -> str | None:
    """Say why a unit does not fit where a frequency is meant, or return None if it does."""
    if unit.frequency:
        return None
    if unit.dimension == RATE:
        return (
            f"`{unit.symbol}` does not say whether it counts radians or cycles: write rad/s, or Hz, rpm, rev/s, "
            "which are 2π rad/s each cycle a second"
        )
    return f"a frequency is wanted here (rad/s, Hz, rpm), not `{unit.symbol}`"


def _combined(left: Unit, right: Unit, power: int, symbol: str) -> Unit:
    return Unit(
        symbol,
        left.factor * right.factor**power,
        left.pi_power + power * right.pi_power,
        left.dimension * right.dimension**power,
        left.angle + power * right.angle,
        left.cycles or right.cycles,
    )


def _bracketed(symbol: str, signs: str) -> str:
    """Put a product into brackets where it has one of these signs in it."""
    return f"({symbol})" if set(symbol) & set(signs) else symbol
