"""Physical dimensions: exponents of the seven base quantities of the SI."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from functools import cache
from itertools import combinations, product

from specgate.terms.records import record

_BASE = ("m", "kg", "s", "A", "K", "mol", "cd")


@record
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
        """Return a short name of the coherent SI unit, as people write it (`N*m`, `m/s/V`); `1` for a plain number."""
        return _names().get(self) or self.in_base_units

    @property
    def in_base_units(self) -> str:
        """The coherent SI unit in base units (`m*kg/s^3/A`)."""
        return _product(zip(_BASE, self.exponents, strict=True), _BASE)


def _dimension(exponents: object) -> Dimension:
    return Dimension(tuple(exponents))  # type: ignore[arg-type]


def _product(factors: Iterable[tuple[str, int]], order: Sequence[str]) -> str:
    """Write a product of units, what is above the line in a given order."""
    powers = dict(factors)
    above = [_power(unit, powers[unit]) for unit in order if powers.get(unit, 0) > 0]
    below = [_power(unit, -powers[unit]) for unit in (*_BASE, *_DERIVED) if powers.get(unit, 0) < 0]
    return "/".join(["*".join(above) or "1", *below])


def _power(unit: str, exponent: int) -> str:
    return unit if exponent == 1 else f"{unit}^{exponent}"


@cache
def _names() -> Mapping[Dimension, str]:
    """Return the cheapest product of at most three units for every dimension that has one."""
    best: dict[tuple[int, ...], tuple[int, tuple[tuple[str, int], ...]]] = {}
    for count in (0, 1, 2, 3):
        for units in combinations(_COSTS, count):
            for powers in product(*(_POWERS if unit in "ms" else (1, -1) for unit in units)):
                factors = tuple(zip(units, powers, strict=True))
                exponents = [sum(column) for column in zip((0,) * len(_BASE), *map(_exponents, factors), strict=False)]
                cost = sum(_COSTS[unit] * (1 + abs(power)) for unit, power in factors)
                known = best.get(tuple(exponents))
                if known is None or cost < known[0]:
                    best[tuple(exponents)] = cost, factors
    order = (*_DERIVED, *_BASE)
    return {_dimension(exponents): _product(factors, order) for exponents, (_, factors) in best.items()}


@cache
def _exponents(factor: tuple[str, int]) -> tuple[int, ...]:
    unit, power = factor
    return tuple(exponent * power for exponent in _UNITS[unit].exponents)


DIMENSIONLESS = Dimension()
LENGTH = Dimension((1, 0, 0, 0, 0, 0, 0))
MASS = Dimension((0, 1, 0, 0, 0, 0, 0))
TIME = Dimension((0, 0, 1, 0, 0, 0, 0))
CURRENT = Dimension((0, 0, 0, 1, 0, 0, 0))
TEMPERATURE = Dimension((0, 0, 0, 0, 1, 0, 0))
AMOUNT = Dimension((0, 0, 0, 0, 0, 1, 0))
LUMINOUS_INTENSITY = Dimension((0, 0, 0, 0, 0, 0, 1))
RATE = TIME**-1

_FORCE = MASS * LENGTH / TIME**2
_POWER = _FORCE * LENGTH / TIME
_VOLTAGE = _POWER / CURRENT
_DERIVED = ("N", "Pa", "W", "V", "ohm")
_UNITS: Mapping[str, Dimension] = {
    **dict(zip(_BASE, (LENGTH, MASS, TIME, CURRENT, TEMPERATURE, AMOUNT, LUMINOUS_INTENSITY), strict=True)),
    **dict(zip(_DERIVED, (_FORCE, _FORCE / LENGTH**2, _POWER, _VOLTAGE, _VOLTAGE / CURRENT), strict=True)),
}
_COSTS: Mapping[str, int] = {
    **dict.fromkeys(("m", "s", "K", "mol", "cd", "V"), 10),
    "kg": 12,
    **dict.fromkeys(("N", "ohm"), 15),
    "Pa": 17,
    "W": 18,
    "A": 24,
}
"""What a unit costs in a name: the cheapest is taken (N/m before kg/s^2, m/s/V before A/N, kg*m^2 before N*m*s^2)."""
_POWERS = (1, -1, 2, -2, 3, -3)
