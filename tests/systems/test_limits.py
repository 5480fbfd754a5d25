"""End values, loop type and error constants of transfer functions, worked by hand."""

from __future__ import annotations

import pytest
from flint import fmpq

from specgate.systems.error_constants import (
    acceleration_constant,
    loop_type,
    position_constant,
    velocity_constant,
)
from specgate.systems.limits import final_value, initial_value
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction


def transfer(numerator: list[int], denominator: list[int]) -> TransferFunction:
    return TransferFunction(highest_first(numerator), highest_first(denominator))


SIZE = fmpq(3, 2)


def test_first_value_is_the_jump() -> None:
    assert initial_value(transfer([4, 1], [2, 7]), SIZE) == 3
    assert initial_value(transfer([1], [2, 7]), SIZE) == 0
    assert initial_value(transfer([0], [1]), SIZE) == 0
    with pytest.raises(ValueError, match="improper"):
        initial_value(transfer([1, 0, 0], [1, 1]), SIZE)


@pytest.mark.parametrize(
    ("numerator", "denominator", "final"),
    [
        ([5], [1, 2], fmpq(15, 4)),
        ([1, 0], [1, 2], fmpq(0)),
        # The limit theorem would give -3/2 for a response that grows without bound, and 3/2 for one that never rests.
        ([1], [1, -1], None),
        ([1], [1, 0, 1], None),
        ([1], [1, 0], None),
        # Exact cancellation first: s/(s (s + 2)) settles, (s - 1)/((s - 1)(s + 2)) too.
        ([1, 0], [1, 2, 0], fmpq(3, 4)),
        ([1, -1], [1, 1, -2], fmpq(3, 4)),
        ([0], [1, -1], fmpq(0)),
    ],
)
def test_last_value_exists_only_where_the_response_settles(
    numerator: list[int], denominator: list[int], final: fmpq | None
) -> None:
    assert final_value(transfer(numerator, denominator), SIZE) == final


@pytest.mark.parametrize(
    ("numerator", "denominator", "expected"),
    [
        ([8], [1, 3, 2], (0, fmpq(4), fmpq(0), fmpq(0))),
        ([8], [1, 3, 2, 0], (1, None, fmpq(4), fmpq(0))),
        ([8, 6], [1, 3, 0, 0], (2, None, None, fmpq(2))),
        ([8], [1, 0, 0, 0], (3, None, None, None)),
        ([5, 0], [1, 4], (-1, fmpq(0), fmpq(0), fmpq(0))),
        # s/s^2 (s + 2): one integrator after cancellation.
        ([3, 0], [1, 2, 0, 0], (1, None, fmpq(3, 2), fmpq(0))),
        ([0], [1, 0], (0, fmpq(0), fmpq(0), fmpq(0))),
        ([-4], [1, 2, 0], (1, None, fmpq(-2), fmpq(0))),
    ],
)
def test_type_and_constants(
    numerator: list[int], denominator: list[int], expected: tuple[int, fmpq | None, fmpq | None, fmpq | None]
) -> None:
    opened = transfer(numerator, denominator)
    constants = position_constant(opened), velocity_constant(opened), acceleration_constant(opened)
    assert (loop_type(opened), *constants) == expected
