"""Numbers in shall-sentences: their value, their unit, and the side on which they limit."""

from __future__ import annotations

import pytest

from specgate.terms.units import UnitTable
from specgate.traceability.texts import stated

UNITS = UnitTable.standard()


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (
            "It shall settle within 2 % of a 50 mm step in no more than 1.2 s.",
            [("2", "%", "both"), ("50", "mm", None), ("6/5", "s", "upper")],
        ),
        ("a gain margin of at least 6 dB", [("6", "dB", "lower")]),
        ("shall amplify no disturbance by more than a factor of 1.4", [("7/5", "1", "upper")]),
        ("shall follow up to at least 0.15 Hz", [("3/20", "Hz", "lower")]),
        ("shall stay between 2 bar and 3 bar", [("2", "bar", "lower"), ("3", "bar", "upper")]),
        ("shall stay between -2 and 3 bar", [("-2", "1", "lower"), ("3", "bar", "upper")]),
        ("shall not exceed 5 degrees", [("5", "deg", "upper")]),
        ("shall exceed 5 per cent", [("5", "%", "lower")]),
        ("shall not fall below 3.5 m/s", [("7/2", "m/s", "lower")]),
        ("shall be 60 s or less", [("60", "s", "upper")]),
        ("shall be 60 s or more", [("60", "s", "lower")]),
        ("shall be less than 1e-3 kN/(m/s).", [("1/1000", "kN/(m/s)", "upper")]),
        ("shall be known to \u00b1 0.2 deg", [("1/5", "deg", "both")]),
        ("shall be \u2265 3 V and \u2264 4 V", [("3", "V", "lower"), ("4", "V", "upper")]),
        ("shall have at least 2 integrators", [("2", "1", "lower")]),
        ("SAS-SYS-113, revision 2b and item 3.2.1", [("2", "1", None), ("16/5", "1", None)]),
        ("shall be swift", []),
    ],
)
def test_what_is_stated(text: str, expected: list[tuple[str, str, str | None]]) -> None:
    assert [(str(one.number), one.unit.symbol, one.side) for one in stated(text, UNITS)] == expected
