"""One YAML file to nodes: exact scalars, YAML 1.2 words, places."""

from __future__ import annotations

from decimal import Decimal

import pytest

from specgate.intake.collect import Collector
from specgate.intake.nodes import Items, Node, Nothing, Number, Origin, Table, Text, Truth, plain
from specgate.intake.reader import Allowance, read
from specgate.terms.places import Place


def parsed(text: str | bytes, collector: Collector | None = None) -> Node:
    data = text.encode() if isinstance(text, str) else text
    collector = collector or Collector()
    node = read(data, Origin("file.yaml"), Allowance(), collector)
    assert not collector.findings, collector.findings
    return node


@pytest.mark.parametrize(
    ("written", "value"),
    [
        ("1e3", 1000),
        ("1.0e3", 1000),
        ("1000", 1000),
        ("1000.0", 1000),
        ("0.10", Decimal("0.1")),
        (".5", Decimal("0.5")),
        ("5.", 5),
        ("-1.5e-3", Decimal("-0.0015")),
        ("+7", 7),
        ("010", 10),
        ("true", True),
        ("false", False),
        ("null", None),
        ("~", None),
        ("", None),
        ("yes", "yes"),
        ("no", "no"),
        ("on", "on"),
        ("Off", "Off"),
        ("12:30", "12:30"),
        ("12:30:00", "12:30:00"),
        ("1_000", "1_000"),
        ("0x1F", "0x1F"),
        ("0b11", "0b11"),
        ("2026-01-02", "2026-01-02"),
        (".inf", ".inf"),
        (".nan", ".nan"),
        ("=", "="),
        ("'1'", "1"),
        ('"true"', "true"),
        ("1e3 V", "1e3 V"),
    ],
)
def test_scalars_are_read_by_yaml_1_2(written: str, value: object) -> None:
    found = plain(parsed(f"key: {written}\n"))["key"]
    assert found == value
    assert type(found) is type(value)


def test_a_number_never_passes_through_a_binary_float() -> None:
    node = parsed("key: 0.1\n")
    assert isinstance(node, Table)
    number = node.get("key")
    assert isinstance(number, Number)
    assert number.text == "0.1"
    assert number.exact == Decimal(1) / Decimal(10)


def test_the_kinds_of_nodes() -> None:
    node = parsed("{a: [1, x], b: true, c: }")
    assert isinstance(node, Table)
    assert node.braces
    kinds = [type(value) for _, value in node.items()]
    assert kinds == [Items, Truth, Nothing]


def test_places_count_from_one_in_characters() -> None:
    node = parsed("größe:\n  - {ä: 'x', drü: 5 m}\n")
    assert isinstance(node, Table)
    rows = node.get("größe")
    assert isinstance(rows, Items)
    inner = rows.nodes[0]
    assert isinstance(inner, Table)
    entry = inner.entries["drü"]
    assert entry.key.spot.place == Place("file.yaml", 2, 14)
    assert entry.value.spot.place == Place("file.yaml", 2, 19)


@pytest.mark.parametrize(
    ("written", "column"),
    [("key: lag + 1", 12), ('key: "lag + 1"', 13), ("key: 'lag + 1'", 13), ("key: >\n  lag + 1", 6)],
)
def test_a_place_inside_a_text(written: str, column: int) -> None:
    node = parsed(written)
    assert isinstance(node, Table)
    text = node.get("key")
    assert isinstance(text, Text)
    assert text.place_of(6).column == column


def test_windows_line_ends_and_byte_order_mark() -> None:
    assert plain(parsed(b"\xef\xbb\xbfa: 1\r\nb: x\r\n")) == {"a": 1, "b": "x"}


def test_keys_are_texts_as_written() -> None:
    assert list(plain(parsed("4.10: a\n007: b\ntrue: c\n"))) == ["4.10", "007", "true"]


def test_the_first_of_two_equal_keys_is_kept_and_both_are_shown() -> None:
    collector = Collector()
    node = read(b"a: 1\nb: {c: 1, c: 2}\na: {d: 3}\n", Origin("file.yaml"), Allowance(), collector)
    assert plain(node) == {"a": 1, "b": {"c": 1}}
    assert [(str(f.place), str(f.related[0].place)) for f in collector.findings] == [
        ("file.yaml:2:11", "file.yaml:2:5"),
        ("file.yaml:3:1", "file.yaml:1:1"),
    ]


def test_findings_beyond_any_use_are_left_out_and_it_is_said() -> None:
    collector = Collector()
    read(("a: 1\n" * 5000).encode(), Origin("file.yaml"), Allowance(), collector)
    problems = collector.problems(())
    assert len(problems.findings) == 301
    assert problems.findings[-1].message == "only the first 300 findings are shown: put these right first"
