"""What YAML does behind the writer's back, in words: hints that are added to messages."""

from __future__ import annotations

import re
from itertools import pairwise

from specgate.intake.nodes import Entry, Node, Nothing, Number, Table, Text

_TRUTHS = {"yes": "true", "on": "true", "y": "true", "no": "false", "off": "false", "n": "false"}
_UNDERSCORES = re.compile(r"[+-]?[0-9]+(_[0-9]+)+(\.[0-9_]+)?")
_CLOCK = re.compile(r"[0-9]+(:[0-9]{2}){1,2}")
_COMMA = re.compile(r"[+-]?[0-9]+,[0-9]+")

_QUANTITY = re.compile(r"[-+]?[0-9.]")
_REST = re.compile(r"[0-9]+(?:[eE][+-]?[0-9]+)?\s+\S")
_WHOLE = re.compile(r"[+-]?\d+")
_NO_NUMBER = re.compile(r"[+-]?\.(inf|Inf|INF|nan|NaN|NAN)")

_INDICATORS = {
    "%": "a value that begins with % needs quotes: write '%'",
    "@": "a value that begins with @ needs quotes",
    "`": "a value that begins with ` needs quotes",
    "\t": "a tab is no indentation in YAML: use spaces",
    "|": "a value that begins with | needs quotes",
    ">": "a value that begins with > needs quotes",
}


def scalar_hint(text: str) -> str | None:
    """Say why a text is not the number or yes/no that it looks like, or return None."""
    if text.lower() in _TRUTHS:
        return f"`{text}` is text in YAML 1.2: write {_TRUTHS[text.lower()]}"
    number = re.split(r"\s", text, maxsplit=1)[0]
    if _UNDERSCORES.fullmatch(number):
        return f"`{number}` is text in YAML 1.2: write {number.replace('_', '')}"
    if _CLOCK.fullmatch(number):
        return f"`{number}` is text in YAML 1.2, not a number in base 60: write a quantity with its unit"
    if _NO_NUMBER.fullmatch(number):
        return f"`{number}`: what is infinite or undefined has no place in a specification"
    if _COMMA.fullmatch(number):
        return f"`{number}`: the decimal sign is a point, write {number.replace(',', '.')}"
    return None


def cut_before(table: Table, key: Text) -> Entry | None:
    """Return the entry whose value a comma inside braces has cut, if `key` looks like the part that was cut off."""
    if not table.braces or not isinstance(table.entries[key.value].value, Nothing):
        return None
    names = list(table.entries)
    position = names.index(key.value)
    return table.entries[names[position - 1]] if position else None


def split_by_comma(table: Table, key: Text) -> str | None:
    """Say that a comma inside braces has split a text or a number, if `key` looks like the part that was cut off."""
    before = cut_before(table, key)
    if before is None:
        return None
    name, value = before.key.value, before.value
    start = value.value if isinstance(value, Text) else value.text if isinstance(value, Number) else "…"
    if _WHOLE.fullmatch(start) and key.value[:1].isdigit():
        return f"a comma inside braces splits, and the decimal sign is a point: write `{name}: {start}.{key.value}`"
    if _QUANTITY.match(start) and _QUANTITY.match(key.value):
        return f"a comma inside braces splits: write a list, `{name}: [{start}, {key.value}]`"
    return f'a comma inside braces splits: put the text in quotes, `{name}: "{start}, {key.value}"`'


def cut_number(first: str, second: str) -> str | None:
    """Say that a comma without a space has made two entries of a list of one quantity, or return None.

    Only where the first is a bare whole number and the second has a unit: `[1,2]` is a list of two like any other.
    """
    if _WHOLE.fullmatch(first) and _REST.match(second):
        return (
            f"`{first},{second}` in a list is two entries, {first} and {second}; the decimal sign is a point: write "
            f"`{first}.{second}`, or a space after the comma if two are meant"
        )
    return None


def split_in_list(nodes: tuple[Node, ...]) -> str | None:
    """Say that a decimal comma may have made two entries of one in a list that has too many, or return None."""
    for before, after in pairwise(nodes):
        if not isinstance(before, Number) or not isinstance(after, Number | Text) or not _WHOLE.fullmatch(before.text):
            continue
        second = after.text if isinstance(after, Number) else after.value
        beside = before.spot.line == after.spot.line and before.spot.column + len(before.text) + 1 == after.spot.column
        if beside and second[:1].isdigit():
            return (
                f"the decimal sign is a point, write `{before.text}.{second}` if `{before.text},{second}` is one number"
            )
    return None


def syntax_hint(lines: list[str], line: int, column: int, opened: tuple[int, int] | None, problem: str) -> str:
    """Say what is most likely wrong where the YAML reader stopped (line and column from 0)."""
    text = lines[line] if line < len(lines) else ""
    rest, before = text[column:], text[:column]
    if len(before) - len(before.rstrip("[{ ")) > 60:
        return "nested too deep"
    if "end of stream" in problem or "document indicator" in problem:
        where = f"opened in line {opened[0] + 1}" if opened else "opened above"
        return f"a quote or bracket {where} is never closed"
    if rest[:1] in _INDICATORS:
        return _INDICATORS[rest[0]]
    if before.rstrip()[-1:] in ("|", ">") and "line break" in problem:
        return _INDICATORS[before.rstrip()[-1]]
    if rest.startswith(":") and before.count(":") >= 1:
        return "a colon inside plain text: put the text in quotes"
    if "mapping values" in problem:
        return "a key stands deeper than the line above allows: check the indentation and the quotes of the line above"
    if "sequence entries" in problem:
        return "a list item cannot begin here: start the list on a line of its own"
    if "escape" in problem:
        return "a backslash inside double quotes begins an escape: use single quotes"
    if re.search(r"""(['"\]}])\s*$""", before):
        return "text goes on after a closing quote or bracket: put the whole value in quotes, or close a quote above"
    if "or ']'" in problem or "or '}'" in problem:
        where = f" opened in line {opened[0] + 1}" if opened else ""
        return f"a comma or the closing bracket of the list or braces{where} is missing"
    if rest[:1] in ("%", "}", "]", ","):
        return f"`{rest[0]}` cannot stand here: a value that begins with it needs quotes"
    return "check the indentation, and put texts with : # , or brackets in quotes"
