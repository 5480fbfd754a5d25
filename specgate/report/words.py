"""The words of the report. Status is always a word, then a shape, then a colour."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from specgate.report.digits import decimal, number
from specgate.review.types import Amount, DefinitionReview, LimitReview
from specgate.terms.records import record


@record
class Status:
    """A state in words, with its own shape; `key` names its colour in the styles. `weight` sorts the worst first."""

    key: str
    word: str
    shape: str
    weight: int


VERDICTS = {
    "non_compliant": Status("non_compliant", "non-compliant", "◆", 0),
    "open": Status("open", "open", "○", 1),
    "compliant": Status("compliant", "compliant", "●", 2),
    "not_applicable": Status("not_applicable", "not applicable", "–", 3),
}
STANDINGS = {
    "out_of_range": Status("out_of_range", "out of range", "▲", 0),
    "inconclusive": Status("inconclusive", "inconclusive", "◧", 1),
    "sound": Status("sound", "sound", "■", 2),
}
OUTCOMES = {
    "hold": Status("hold", "holds", "◆", 0),
    "pass": Status("pass", "passes", "●", 1),
    "unusable": Status("unusable", "input unusable", "◆", 0),
}
LEVELS = {
    "error": Status("error", "error", "◆", 0),
    "warning": Status("warning", "warning", "△", 1),
    "note": Status("note", "note", "·", 2),
}
CONDITIONS = {
    True: Status("holds", "holds", "■", 2),
    False: Status("violated", "violated", "▲", 0),
    None: Status("undecided", "undecided", "◧", 1),
}
METHODS = {
    "due_later": Status("due_later", "due later", "–", 3),
    "no_record": Status("no_record", "no record", "○", 1),
    **VERDICTS,
}
SIDES = {"unsafe": "on the unsafe side", "safe": "on the safe side", "none": "on neither side"}
UNITLESS = ("1", "", None)


def spaced(name: str) -> str:
    """Return a name of the format as words (`settling_time`: settling time)."""
    return name.replace("_", " ")


def titled(name: str, definitions: Mapping[str, DefinitionReview]) -> str:
    """Return the title of a measure, approximation or rule, from its definition where there is one."""
    return definitions[name].title if name in definitions else spaced(name).capitalize()


def with_unit(text: str, unit: str | None) -> str:
    """Return a number and its unit; dimensionless numbers stand alone."""
    return text if unit in UNITLESS else f"{text} {unit}"


def amount(value: Amount) -> str:
    """Return an amount with its unit, or a word where it is unlimited or absent."""
    if value.infinite:
        return "unlimited"
    return "none" if value.value is None else with_unit(number(value.value), value.unit)


def yes_no(value: bool) -> str:
    """Return yes or no."""
    return "yes" if value else "no"


def limit(of: LimitReview) -> str:
    """Return a limit in signs, with its unit: `≤ 1.2 s`, `0 m ± 1 mm`."""
    if of.at_most is not None:
        return f"≤ {amount(of.at_most)}"
    if of.at_least is not None:
        return f"≥ {amount(of.at_least)}"
    if of.between is not None:
        return f"{amount(of.between[0])} … {amount(of.between[1])}"
    if of.within is not None and of.of is not None:
        return f"{amount(of.of)} ± {amount(of.within)}"
    return f"= {yes_no(of.equals) if isinstance(of.equals, bool) else of.equals}"


def limit_in_words(of: LimitReview) -> str:
    """Return a limit for a sentence: `at most 1.2 s`."""
    if of.at_most is not None:
        return f"at most {amount(of.at_most)}"
    if of.at_least is not None:
        return f"at least {amount(of.at_least)}"
    if of.between is not None:
        return f"between {amount(of.between[0])} and {amount(of.between[1])}"
    if of.within is not None and of.of is not None:
        return f"within {amount(of.within)} of {amount(of.of)}"
    return yes_no(of.equals) if isinstance(of.equals, bool) else f"exactly {of.equals}"


def demanded(of: LimitReview) -> str:
    """Return a limit as what is allowed or required: `allowed at most 1.2 s`, `required at least 6 dB`."""
    return f"{'allowed' if of.at_most is not None else 'required'} {limit_in_words(of)}"


def edges(of: LimitReview) -> tuple[float, ...]:
    """Return the numbers at which the limit lies, in its own unit; none for yes/no and for unlike units."""
    if of.between is not None:
        return tuple(a.value for a in of.between if a.value is not None)
    if of.within is not None and of.of is not None:
        middle, half = of.of.value, of.within.value
        if middle is None or half is None or not _alike(of):
            return ()
        return float(decimal(middle) - decimal(half)), float(decimal(middle) + decimal(half))
    one = of.at_most or of.at_least
    return () if one is None or one.value is None else (one.value,)


def _alike(of: LimitReview) -> bool:
    return of.of is not None and of.within is not None and (of.of.unit == of.within.unit or of.of.value == 0)


def counted(count: int, singular: str, plural: str | None = None) -> str:
    """Return a count with its noun: `1 requirement`, `2 requirements`."""
    return f"{count} {singular if count == 1 else plural or singular + 's'}"


def listed(items: Iterable[str], last: str = "and") -> str:
    """Return items as a list in a sentence: `a, b and c`."""
    names = list(items)
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} {last} {names[-1]}" if names else ""


def arguments(of: Mapping[str, str] | None) -> str:
    """Return the arguments of a measure: `band 2 % of the change`."""
    return ", ".join(f"{spaced(name)} {value}" for name, value in (of or {}).items())
