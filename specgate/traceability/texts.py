"""What a shall-sentence says in numbers: each number with its unit and the side on which it limits.

Only phrases that leave no doubt give a side: `no more than`, `at least`, `within`, `between … and …` and their like. A
negation before a comparison turns it round (`no disturbance by more than 1.8`).
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace
from itertools import pairwise
from typing import Literal

from flint import fmpq

from specgate.terms.decimals import DecimalError, exact_decimal
from specgate.terms.records import record
from specgate.terms.unit import ONE, Unit
from specgate.terms.units import UnitError, UnitTable

Side = Literal["upper", "lower", "both"]

_NUMBER = re.compile(r"(?<![\w.,-])[-+−]?[0-9]+(?:\.[0-9]+)?(?:[eE][-+]?[0-9]+)?(?![0-9])")
_UNIT = re.compile(r"\s?(?P<unit>%|per cent|[A-Za-zµΩ°][\w°/*^()·]*)")
_UPPER = (
    r"(?:no|not) (?:more|greater|later|longer|higher|larger|wider) than",
    r"at most",
    r"(?:less|smaller|shorter|lower|sooner) than",
    r"not (?:to )?(?:exceed|exceeding|above)",
    r"below",
    r"up to",
    r"a maximum of",
    r"<=|≤|<",
)
_LOWER = (
    r"(?:no|not) (?:less|smaller|fewer|shorter|lower|sooner|earlier) than",
    r"at least",
    r"(?:more|greater|longer|higher|larger|later) than",
    r"exceed(?:s|ing)?",
    r"not (?:to )?(?:fall )?below",
    r"above",
    r"a minimum of",
    r">=|≥|>",
)
_BOTH = (r"within", r"±", r"\+/-")
_BEFORE = re.compile(
    "(?:"
    + "|".join(
        f"(?P<{side}>{'|'.join(phrases)})"
        # what is negated is looked for first: `not below` before `below`
        for side, phrases in (("both", _BOTH), ("lower", _LOWER), ("upper", _UPPER))
    )
    + r")(?: (?:a |an )?factor of| ±)?\s*$",
    re.IGNORECASE,
)
_NEGATED = re.compile(r"\b(?:no|not|never|nothing|none)\b[^,;.]{0,60}$", re.IGNORECASE)
_COMPARING = re.compile(r"^(?:more|greater|longer|higher|larger|later|exceed|above|below|less|smaller)", re.IGNORECASE)
_AFTER = re.compile(r"^\s?\S{0,12}\s+or (?P<word>less|fewer|more|greater|better)", re.IGNORECASE)
_BETWEEN = re.compile(r"\b(?:between|from)\s*$", re.IGNORECASE)
_AND = re.compile(r"^\s*(?:\S{1,12}\s+)?(?:and|to)\s+$", re.IGNORECASE)
_WORDS = {
    "degree": "deg",
    "degrees": "deg",
    "second": "s",
    "seconds": "s",
    "millisecond": "ms",
    "milliseconds": "ms",
    "minute": "min",
    "minutes": "min",
    "hour": "h",
    "hours": "h",
    "percent": "%",
    "per cent": "%",
    "metre": "m",
    "metres": "m",
    "millimetre": "mm",
    "millimetres": "mm",
    "decibel": "dB",
    "decibels": "dB",
    "kelvin": "K",
    "volt": "V",
    "volts": "V",
}


@record
class Stated:
    """A number in a text. unit: 1 where none stands behind it. side: on which it limits; None: that is not said."""

    number: fmpq
    unit: Unit
    side: Side | None
    words: str


def stated(text: str, units: UnitTable) -> tuple[Stated, ...]:
    """Return the numbers of a text in their order."""
    flat = " ".join(text.split())
    matches = list(_NUMBER.finditer(flat))
    found = [one for match in matches for one in _number(match, flat, units)]
    for index, (match, after) in enumerate(pairwise(matches)):
        pair = _BETWEEN.search(flat[: match.start()]) and _AND.match(flat[match.end() : after.start()])
        if pair and len(found) == len(matches):
            found[index], found[index + 1] = (
                replace(found[index], side="lower"),
                replace(found[index + 1], side="upper"),
            )
    return tuple(found)


def _number(match: re.Match[str], text: str, units: UnitTable) -> Iterator[Stated]:
    """Give the number of a match; none that is out of reach."""
    try:
        number = exact_decimal(match[0].replace("−", "-"))
    except DecimalError:
        return
    before, after = text[: match.start()], text[match.end() :]
    unit, written = _unit(after, units)
    phrase = _BEFORE.search(before)
    words = f"{phrase[0].strip() + ' ' if phrase else ''}{match[0]}{' ' + written if written else ''}"
    yield Stated(number, unit, _side(before, after), words)


def _unit(after: str, units: UnitTable) -> tuple[Unit, str]:
    """Return the unit behind a number and how it is written; 1 where a word stands there that is none."""
    match = _UNIT.match(after)
    if match is None:
        return ONE, ""
    written = match["unit"].rstrip(".,;:")
    while written.count(")") > written.count("("):
        written = written[:-1]
    try:
        return units.parse(_WORDS.get(written.lower(), written)), written
    except UnitError:
        return ONE, ""


def _side(before: str, after: str) -> Side | None:
    phrase = _BEFORE.search(before)
    if phrase is None:
        behind = _AFTER.match(after)
        return None if behind is None else "upper" if behind["word"].lower() in ("less", "fewer") else "lower"
    if phrase["both"]:
        return "both"
    side: Side = "upper" if phrase["upper"] else "lower"
    word = phrase["upper"] or phrase["lower"]
    if _COMPARING.match(word) and _NEGATED.search(before[: phrase.start()]):
        return "lower" if side == "upper" else "upper"
    return side
