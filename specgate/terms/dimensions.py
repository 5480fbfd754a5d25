"""Physical dimensions: exponents of the seven base quantities of the SI."""

from __future__ import annotations

from dataclasses import dataclass

_BASE = ("m", "kg", "s", "A", "K", "mol", "cd")


@dataclass(frozen=True)
class Dimension:
    """Exponents of metre, kilogram, second, ampere, kelvin, mole and candela, in this order.

    Plane angle has none (SI Brochure, 9th edition, 2.3.3): a radian is 1.
    """

    exponents: tuple[int, int, int, int, int, int, int] = (0, 0, 0, 0, 0, 0, 0)

    def __mul__(self, other: Dimension) -> Dimension:
        return _dimension(a + b for a, b in zip(self.exponents, other.exponents, strict=True))

    def __truediv__(self, other: Dimension) -> Dimension:
        return _dimension(a - b for a, b in zip(self.exponents, other.exponents, strict=True))

    def __pow__(self, power: int) -> Dimension:
        return _dimension(a * power for a in self.exponents)

    def __str__(self) -> str:
        """Return the coherent SI unit in base units (`m*kg/s^3/A`), `1` for a plain number."""
        above = [_power(unit, n) for unit, n in zip(_BASE, self.exponents, strict=True) if n > 0]
        below = [_power(unit, -n) for unit, n in zip(_BASE, self.exponents, strict=True) if n < 0]
        return "/".join(["*".join(above) or "1", *below])


def _dimension(exponents: object) -> Dimension:
    return Dimension(tuple(exponents))  # type: ignore[arg-type]


def _power(unit: str, exponent: int) -> str:
    return unit if exponent == 1 else f"{unit}^{exponent}"


DIMENSIONLESS = Dimension()
LENGTH = Dimension((1, 0, 0, 0, 0, 0, 0))
MASS = Dimension((0, 1, 0, 0, 0, 0, 0))
TIME = Dimension((0, 0, 1, 0, 0, 0, 0))
CURRENT = Dimension((0, 0, 0, 1, 0, 0, 0))
TEMPERATURE = Dimension((0, 0, 0, 0, 1, 0, 0))
AMOUNT = Dimension((0, 0, 0, 0, 0, 1, 0))
LUMINOUS_INTENSITY = Dimension((0, 0, 0, 0, 0, 0, 1))
RATE = TIME**-1
