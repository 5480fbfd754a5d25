"""The assumption of the rounding bound on this machine: exp, sin and cos of numpy are within 4 ulp, against balls."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from flint import arb

from specgate.response.layout import FAR
from specgate.terms.precision import working_precision

ALLOWED_ULP = 4.0


def samples(low: float, high: float, count: int) -> np.ndarray:
    """Return floats of all sizes in a range, the same ones on every run, in a length that vector units like."""
    random = np.random.default_rng(20260211)
    even = random.uniform(low, high, count // 2)
    small = np.exp(random.uniform(np.log(1e-12), np.log(max(abs(low), abs(high))), count - count // 2))
    return np.concatenate([even, np.where(small <= high, small, -small)])


def worst_ulp(values: np.ndarray, results: np.ndarray, true: Callable[[arb], arb]) -> float:
    """Return the largest distance from the truth in units of the last place of the result."""
    worst = 0.0
    with working_precision(120):
        for value, result in zip(values.tolist(), results.tolist(), strict=True):
            distance = abs(true(arb(value)) - arb(result))
            worst = max(worst, float(distance.upper()) / float(np.spacing(abs(result))))
    return worst


@pytest.mark.parametrize("count", [1, 7, 4096])
def test_exp(count: int) -> None:
    values = samples(-700.0, 5.0, 4096)
    results = np.concatenate([np.exp(part) for part in np.array_split(values, max(1, len(values) // count))])
    assert worst_ulp(values, results, arb.exp) <= ALLOWED_ULP


@pytest.mark.parametrize("count", [1, 7, 4096])
@pytest.mark.parametrize("high", [4.0, 1e3, FAR])
def test_sine_and_cosine(high: float, count: int) -> None:
    values = samples(0.0, high, 4096)
    parts = np.array_split(values, max(1, len(values) // count))
    assert worst_ulp(values, np.concatenate([np.sin(part) for part in parts]), arb.sin) <= ALLOWED_ULP
    assert worst_ulp(values, np.concatenate([np.cos(part) for part in parts]), arb.cos) <= ALLOWED_ULP
