from __future__ import annotations

import pytest

from specgate.terms.names import nearest


@pytest.mark.parametrize(
    ("word", "known", "expected"),
    [
        ("settling_tim", ["rise_time", "settling_time"], "settling_time"),
        ("RPM", ["ppm", "rpm"], "rpm"),
        ("zzz", ["settling_time"], None),
        ("s" * 1000, ["s"], None),
        ("lag", [], None),
    ],
)
def test_nearest_name(word: str, known: list[str], expected: str | None) -> None:
    assert nearest(word, known) == expected
