"""A general-purpose control library as a reference: margins and crossings of random loops."""

from __future__ import annotations

import random
import warnings
from collections.abc import Callable
from importlib import import_module
from math import inf
from typing import Any

import pytest

from specgate.frequency.rational_loop import RationalLoop
from specgate.response.answers import Answer
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from tests.frequency.test_independent import CLASSES, Pair, Reference

control: Any = import_module("control")


def number(answer: Answer) -> float:
    if answer.absent is not None:
        return inf
    return float(answer.enclose(64).mid())


@pytest.mark.parametrize("make", CLASSES[:4], ids=lambda make: make.__qualname__)
@pytest.mark.parametrize("seed", range(100, 106))
def test_margins(make: Callable[[random.Random], Pair], seed: int) -> None:
    above, below = make(random.Random(f"{make.__qualname__} {seed}"))
    if not is_hurwitz(above + below):
        return
    loop, reference = RationalLoop(TransferFunction(above, below), stable=True), Reference(above, below)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        plant = control.tf(reference.floats(above), reference.floats(below))
        gains, phases, distances, at_phase, at_gain, _ = control.stability_margins(plant, returnall=True)
    # theirs leaves zero frequency to the caller, and where it crosses by rounding alone
    listed = [c for c in loop.crossings() if c.frequency.exact != 0 and c.frequency.absent is None]
    ours = [number(c.frequency) for c in listed if c.kind == "gain"]
    assert sorted(at_gain) == pytest.approx(ours, rel=1e-5)
    if ours:
        assert min(abs(phases)) == pytest.approx(number(loop.phase_margin()) * 57.29577951308232, rel=1e-4)
    for factor, frequency in zip(gains, at_phase, strict=True):
        if frequency > 0 and 1e-6 < factor < 1e6:
            margins = [number(c.margin) for c in listed if c.kind == "phase"]
            assert any(max(factor, 1 / factor) == pytest.approx(margin, rel=1e-4) for margin in margins)
    if len(distances):
        assert number(loop.least_distance()) <= min(distances) * (1 + 1e-6)
