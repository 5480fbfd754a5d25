"""Masks over frequency on gains with a dead time inside, against floats on a fine raster and by hand."""

from __future__ import annotations

import random
from itertools import pairwise

import numpy as np
import pytest
from flint import fmpq

from specgate.delays.gain import DelayedGain
from specgate.delays.masks import late_inside
from specgate.response.questions import Mask
from specgate.systems.delayed_network import DelayedTransfer

from .conftest import closed, late

LOOPS = {
    "lag with PI": ([fmpq(9, 10), fmpq(1, 2)], [2, 1, 0], fmpq(1)),
    "integrator": ([fmpq(1)], [1, 0], fmpq(1)),
    "double lag": ([fmpq(3, 2)], [1, 2, 1], fmpq(1, 2)),
}


def channel(name: str) -> DelayedTransfer:
    return closed(late(*LOOPS[name]))


def gain(name: str, w: np.ndarray) -> np.ndarray:
    above, below, delay = LOOPS[name]
    s = 1j * w
    loop = (
        np.polyval([float(c) for c in above], s) / np.polyval([float(c) for c in below], s) * np.exp(-float(delay) * s)
    )
    return np.abs(loop / (1 + loop))


def limits(points: tuple[tuple[fmpq, fmpq], ...], w: np.ndarray, *, logarithmic: bool) -> np.ndarray:
    """Return the limit over frequency, not a number where there is none."""
    found = np.full(w.shape, np.nan)
    for (a, low), (b, high) in pairwise([(float(w0), float(limit)) for w0, limit in points]):
        here = (w >= a) & (w <= b)
        if logarithmic:
            found[here] = low * (w[here] / a) ** (np.log(high / low) / np.log(b / a))
        else:
            found[here] = low + (high - low) * (w[here] - a) / (b - a)
    return found


@pytest.mark.parametrize("name", LOOPS)
def test_random_masks(name: str) -> None:
    rng = random.Random(f"masks {name}")
    w = np.linspace(0.01, 12, 400_001)
    size = gain(name, w)
    inside = outside = 0
    for _ in range(24):
        corners = sorted(rng.sample(range(2, 110), 4))
        logarithmic = rng.random() < 0.5
        beside = [float(gain(name, np.array([k / 10]))[0]) for k in corners]
        upper, lower = (
            tuple(
                (fmpq(k, 10), fmpq(int(g * rng.uniform(*spread) * 10**6), 10**6))
                for k, g in zip(corners, beside, strict=True)
            )
            for spread in ((0.95, 3.0), (0.2, 1.02))
        )
        mask = Mask(upper if rng.random() < 0.7 else (), lower if rng.random() < 0.5 else (), False, logarithmic)
        found = late_inside(channel(name), mask)
        excess = np.fmax(
            np.nan_to_num(size - limits(mask.upper, w, logarithmic=logarithmic), nan=-9.0),
            np.nan_to_num(limits(mask.lower, w, logarithmic=logarithmic) - size, nan=-9.0),
        )
        if abs(excess.max()) < 1e-4:
            continue
        assert found.truth is bool(excess.max() < 0)
        if found.truth:
            inside += 1
            continue
        outside += 1
        assert found.at is not None
        first = found.at["frequency"]
        assert not isinstance(first, str)
        assert abs(float(first.enclose(60)) - w[int(np.argmax(excess > 0))]) < 1e-4
    assert inside > 1
    assert outside > 1


def test_a_mask_that_begins_where_the_gain_does() -> None:
    """The gain of the integrator's loop rises from one at frequency zero: one is no limit for it, two is for ever."""
    found = late_inside(channel("integrator"), Mask(upper=((fmpq(0), fmpq(1)), (fmpq(1), fmpq(1)))))
    assert found.truth is False
    assert found.at is not None
    assert found.at["frequency"].exact == 0  # type: ignore[union-attr]
    assert late_inside(channel("integrator"), Mask(upper=((fmpq(0), fmpq(3)),), forever=True)).truth
    lower = late_inside(channel("integrator"), Mask(lower=((fmpq(0), fmpq(1)), (fmpq(1, 2), fmpq(1)))))
    assert lower.truth


def test_a_lower_limit_for_ever_is_left() -> None:
    found = DelayedGain(channel("double lag")).within(Mask(lower=((fmpq(1, 10), fmpq(1, 4)),), forever=True))
    assert found.truth is False
    assert found.at is not None
    w = np.linspace(0.1, 12, 2_000_001)
    size = gain("double lag", w)
    assert abs(float(found.at["frequency"].enclose(60)) - w[int(np.argmax(size < 0.25))]) < 1e-4  # type: ignore[union-attr]
    for change, stays in ((1 + 1e-6, True), (1 - 1e-6, False)):
        level = fmpq(int(float(size.max()) * change * 10**12), 10**12)
        assert late_inside(channel("double lag"), Mask(upper=((fmpq(0), level),), forever=True)).truth is stays
