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
        return _name(self) or self.in_base_units

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
def _name(dimension: Dimension) -> str | None:
    """Return the cheapest product of at most three units that a dimension has, None if it has none."""
    found = _cheapest().get(_packed(dimension.exponents))
    return None if found is None else _product(found[1], (*_DERIVED, *_BASE))


@cache
def _cheapest() -> Mapping[int, tuple[int, tuple[tuple[str, int], ...]]]:
    """Return cost and factors of the cheapest product for every dimension that has one, by its packed exponents."""
    factors = {
        unit: [
            (cost * (1 + abs(power)), (unit, power), _packed(_UNITS[unit].exponents) * power)
            for power in (_POWERS if unit in "ms" else (1, -1))
        ]
        for unit, cost in _COSTS.items()
    }
    best: dict[int, tuple[int, tuple[tuple[str, int], ...]]] = {0: (0, ())}
    for count in (1, 2, 3):
        for units in combinations(factors.values(), count):
            for chosen in product(*units):
                cost, key = 0, 0
                for one, _, exponents in chosen:
                    cost += one
                    key += exponents
                known = best.get(key)
                if known is None or cost < known[0]:
                    best[key] = cost, tuple(factor for _, factor, _ in chosen)
    return best


def _packed(exponents: Iterable[int]) -> int:
    """Return exponents as one number, so that a product of units is a sum of numbers: a table is made in each run."""
    key = 0
    for exponent in exponents:
        key = key * 4096 + exponent
    return key


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
