"""Units of measurement: the closed table, a project's own units, and unit texts such as `V/(m*s)`."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import replace
from functools import cache
from types import MappingProxyType

from flint import fmpq

from specgate.terms.decimals import LITERAL, DecimalError, exact_decimal
from specgate.terms.dimensions import DIMENSIONLESS, Dimension
from specgate.terms.listed_units import MISTAKEN, OTHER_SPELLINGS, listed
from specgate.terms.names import nearest
from specgate.terms.records import record
from specgate.terms.unit import ONE, PI, PRECISE_PI, Kind, Unit, frequency_problem

__all__ = [
    "DIMENSIONLESS",
    "ONE",
    "PI",
    "PRECISE_PI",
    "RESERVED",
    "Dimension",
    "Kind",
    "Unit",
    "UnitError",
    "UnitTable",
    "frequency_problem",
]

RESERVED = frozenset({"s", "z", "pi"})
"""Names with a meaning of their own: no unit and no parameter may take them."""

_LONGEST = 60
_GREATEST_POWER = 9
_NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]*", re.ASCII)
_TOKEN = re.compile(
    r"(?P<symbol>[A-Za-z%\u00b0\u00b5\u03bc\u03a9\u2126][A-Za-z0-9_\u00b5\u03bc\u03a9\u2126]*)"
    r"|(?P<one>1(?![0-9]))|(?P<power>(?:\^|\*\*)-?[0-9]{1,2}|[\u00b2\u00b3])|(?P<sign>[*/()])"
)
_ONES = re.compile(r"[*/]1(?=[*/)]|$)")
"""What is left of a part that is dimensionless (`m^3/s/1`)."""
_SYMBOL = re.compile(r"[A-Za-z%][A-Za-z0-9_]*", re.ASCII)
_DEFINITION = re.compile(r"(?P<above>[0-9.eE+-]+)(?:/(?P<below>[0-9.eE+-]+))?(?: +(?P<unit>\S.*))?", re.ASCII)


class UnitError(ValueError):
    """A text that is no unit of the table; `nearest` is a symbol of the table that may be meant."""

    def __init__(self, message: str, nearest: str | None = None) -> None:
        super().__init__(message)
        self.message = message
        self.nearest = nearest


@record
class UnitTable:
    """Symbols that may be read: the listed ones and the project's own (`own`)."""

    units: Mapping[str, Unit]
    own: tuple[str, ...] = ()

    @staticmethod
    def standard() -> UnitTable:
        """Return the closed table without any project's own units."""
        return _standard()

    def parse(self, text: str) -> Unit:
        """Read a unit: symbols joined by `*` and `/`, whole powers (`m3`, `m^3`), brackets, `1` for none.

        Raises UnitError. `V/m*s` is refused because readers do not agree on it (SI Brochure 5.4.6).
        """
        text = text.strip()
        if text in self.units:
            return self.units[text]
        if not text or len(text) > _LONGEST:
            raise UnitError("a unit is wanted" if not text else f"`{text[:40]}…` is too long for a unit")
        unit = _Reader(self, text).read()
        return replace(unit, symbol=text)

    def coherent(self, unit: Unit) -> Unit:
        """Return the coherent unit of the same dimension and angle, part by part: `m/s/V` for `mm/s/V`."""
        text = _ONES.sub("", _SYMBOL.sub(lambda found: self._coherent_symbol(found[0]), unit.symbol))
        try:
            found = self.parse(text)
        except UnitError:
            found = ONE
        return found if _is_coherent(found, unit) else self._listed_coherent(unit)

    def _coherent_symbol(self, token: str) -> str:
        stem = token if token in self.units else token.rstrip("0123456789")
        if stem not in self.units:
            return token
        symbol = self._listed_coherent(self.units[stem]).symbol
        power = token[len(stem) :]
        return f"({symbol}){power}" if "/" in symbol or (power and "^" in symbol) else f"{symbol}{power}"

    def _listed_coherent(self, unit: Unit) -> Unit:
        """Return the first unit of the table of this dimension and angle, else one named after the dimension."""
        if unit.dimension == DIMENSIONLESS and not unit.angle:
            return ONE
        plain = (one for one in self.units.values() if one.kind in ("linear", "temperature_difference"))
        listed = next((one for one in plain if _is_coherent(one, unit)), None)
        return listed or Unit(str(unit.dimension), fmpq(1), 0, unit.dimension, unit.angle)

    def is_unit(self, name: str) -> bool:
        """Whether `name` is a symbol of this table, so that no parameter may be called so."""
        return name in self.units

    def with_units(self, definitions: Mapping[str, str]) -> tuple[UnitTable, dict[str, UnitError]]:
        """Add a project's own units (`count: 1/65536 rev`), in any order; also return what is wrong, by name."""
        table, waiting = self, dict(definitions)
        while waiting:
            problems: dict[str, UnitError] = {}
            for name in list(waiting):
                try:
                    table = table._with_unit(name, waiting[name])
                except UnitError as problem:
                    problems[name] = problem
            if len(problems) == len(waiting):
                return table, problems
            waiting = {name: waiting[name] for name in problems}
        return table, {}

    def _with_unit(self, name: str, text: str) -> UnitTable:
        if self.is_unit(name):
            raise UnitError(f"`{name}` is already a unit ({self.units[name].symbol}): choose another name")
        if name in RESERVED or _NAME.fullmatch(name) is None:
            raise UnitError(f"`{name}` cannot be the name of a unit: use letters, digits and _, not {_reserved()}")
        unit = replace(self._defined(text), symbol=name, kind="linear", zero=fmpq(0))
        return UnitTable(MappingProxyType({**self.units, name: unit}), (*self.own, name))

    def _defined(self, text: str) -> Unit:
        match = _DEFINITION.fullmatch(text.strip())
        if match is None:
            raise UnitError(f"`{text[:40]}` does not define a unit: write a number and a unit, as in `1/65536 rev`")
        unit = self.parse(match["unit"] or "1")
        if unit.kind == "decibel":
            raise UnitError("a unit cannot be a multiple of dB")
        try:
            size = exact_decimal(match["above"]) / exact_decimal(match["below"] or "1")
        except DecimalError as problem:
            raise UnitError(str(problem)) from None
        except ZeroDivisionError:
            size = fmpq(0)
        if size <= 0:
            raise UnitError(f"`{text}` does not define a unit: its size must be greater than zero")
        return replace(unit, factor=unit.factor * size)


def _is_coherent(found: Unit, unit: Unit) -> bool:
    """Whether `found` is of the dimension and angle of `unit`, and of size 1."""
    return (found.dimension, found.angle) == (unit.dimension, unit.angle) and found.factor == 1 and not found.pi_power


@cache
def _standard() -> UnitTable:
    return UnitTable(MappingProxyType(listed()))


def _reserved() -> str:
    return ", ".join(sorted(RESERVED))


class _Reader:
    """Recursive descent over a unit text; its length bounds the depth."""

    def __init__(self, table: UnitTable, text: str) -> None:
        self.table, self.text, self.at = table, text, 0
        self.tokens = list(self._tokens())

    def _tokens(self) -> Iterable[tuple[str, str]]:
        at = 0
        while at < len(self.text):
            match = _TOKEN.match(self.text, at)
            if match is None:
                raise UnitError(self._unreadable(at))
            yield str(match.lastgroup), match[0]
            at = match.end()

    def _unreadable(self, at: int) -> str:
        if self.text[at] in " \t":
            return f"`{self.text}` has a space in it: write `*` or `/` between units"
        if LITERAL.match(self.text, at):
            return f"`{self.text}`: a number has no place inside a unit, other than a whole power or a leading 1/"
        return f"`{self.text}` is not a unit: `{self.text[at]}` has no place in one"

    def read(self) -> Unit:
        unit = self._product()
        if self.at < len(self.tokens):
            raise UnitError(f"`{self.text}` is not a unit: `*` or `/` is wanted before `{self.tokens[self.at][1]}`")
        return unit

    def _product(self) -> Unit:
        unit, divided = self._power(), False
        while (sign := self._peek()) in ("*", "/"):
            self.at += 1
            if sign == "*" and divided:
                raise UnitError(f"`{self.text}` can be read in two ways: put what is below the line in brackets")
            divided = sign == "/"
            other = self._power()
            if "decibel" in (unit.kind, other.kind):
                raise UnitError("dB stands alone: it cannot be part of a product")
            unit = unit / other if divided else unit * other
        return unit

    def _power(self) -> Unit:
        unit = self._atom()
        kind, token = self.tokens[self.at] if self.at < len(self.tokens) else ("", "")
        if kind == "power":
            self.at += 1
            unit = self._raised(unit, {"²": 2, "³": 3}.get(token) or int(token.lstrip("^*")))
        return unit

    def _raised(self, unit: Unit, power: int) -> Unit:
        if not 0 < abs(power) <= _GREATEST_POWER:
            raise UnitError(f"`{self.text}`: powers of a unit go from 1 to {_GREATEST_POWER}, above or below the line")
        if unit.kind == "decibel":
            raise UnitError("dB stands alone: it has no powers")
        return unit**power

    def _atom(self) -> Unit:
        kind, token = self.tokens[self.at] if self.at < len(self.tokens) else ("", "")
        self.at += 1
        if kind == "symbol":
            return self._symbol(token)
        if kind == "one":
            return ONE
        if token != "(":
            raise UnitError(f"`{self.text}` is not a unit: a symbol is wanted {self._where(token)}")
        unit = self._product()
        if self._peek() != ")":
            raise UnitError(f"`{self.text}`: a closing bracket is missing")
        self.at += 1
        return unit

    def _symbol(self, token: str) -> Unit:
        plain = token
        for sign, letters in OTHER_SPELLINGS.items():
            plain = plain.replace(sign, letters)
        if plain in self.table.units:
            return self.table.units[plain]
        stem = plain.rstrip("0123456789")
        if stem != plain and stem in self.table.units:
            return self._raised(self.table.units[stem], int(plain[len(stem) :][:3]))
        close = MISTAKEN.get(token) or nearest(token, self.table.units)
        known = f"; did you mean `{close}`?" if close else "; other units are defined under `project: units`"
        raise UnitError(f"`{token}` is not a listed unit{known}", close)

    def _peek(self) -> str:
        return self.tokens[self.at][1] if self.at < len(self.tokens) else ""

    def _where(self, token: str) -> str:
        return f"instead of `{token}`" if token else "at its end"
