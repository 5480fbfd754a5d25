"""Samples, envelopes and hulls in floats against the same response in balls: every bound must hold."""

from __future__ import annotations

import numpy as np
import pytest
from flint import arb, fmpq, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.response.cells import Cells, cells_between
from specgate.response.deviation import LOWEST, Deviation
from specgate.response.panels import PanelMaker
from specgate.response.segments import Floats, Segment, exact, float_of
from specgate.response.tables import FloatModes
from specgate.systems.polynomials import highest_first
from specgate.terms.precision import working_precision

size = st.fractions(min_value="1/100", max_value=100, max_denominator=1000)
damping = st.fractions(min_value="1/10000", max_value=2, max_denominator=10000)
real_factor = st.builds(lambda p: highest_first([fmpq(1), _q(p)]), size)
pair_factor = st.builds(lambda w, z: highest_first([fmpq(1), 2 * _q(z) * _q(w), _q(w) ** 2]), size, damping)
factors = st.lists(st.tuples(st.one_of(real_factor, pair_factor), st.integers(1, 4)), min_size=1, max_size=3)


def _q(value: object) -> fmpq:
    return fmpq(value.numerator, value.denominator)  # type: ignore[attr-defined]


def deviation(parts: list[tuple[fmpq_poly, int]], zero: object) -> Deviation:
    """Return the deviation of a response with these poles and one zero."""
    denominator = fmpq_poly([1])
    for factor, multiplicity in parts:
        denominator *= factor**multiplicity
    numerator = highest_first([fmpq(1), _q(zero)])
    if denominator % numerator == 0:
        numerator = fmpq_poly([1])
    divisor = numerator.gcd(denominator)
    return Deviation(numerator // divisor, denominator // divisor, fmpq(1))


def truth(shared: Deviation, start: fmpq, time: float, order: int) -> arb:
    """Return a derivative of g in balls."""
    expansion = shared.at(256)
    with working_precision(expansion.bits):
        return expansion.deviation(arb(start + exact(time)))[order]


def assert_sampled(shared: Deviation, segment: Segment, times: Floats) -> None:
    values, errors = segment.sample(times)
    for k, time in enumerate(times.tolist()):
        for order in range(3):
            with working_precision(300):
                off = abs(truth(shared, segment.start, time, order) - arb(float(values[k, order])))
                assert off <= arb(float(errors[k, order]))


def assert_enclosed(shared: Deviation, cells: Cells) -> None:
    """Look at a few points inside of every cell."""
    for k in range(len(cells.left)):
        for share in (0.0, 0.21, 0.5, 0.83, 1.0):
            time = float(cells.left[k] + share * (cells.right[k] - cells.left[k]))
            hulls = [(cells.low, cells.high), (cells.slope_low, cells.slope_high), (cells.bend_low, cells.bend_high)]
            with working_precision(300):
                for order, (low, high) in enumerate(hulls):
                    value = truth(shared, cells.segment.start, time, order)
                    assert value >= arb(float(low[k]))
                    assert value <= arb(float(high[k]))
                assert abs(truth(shared, cells.segment.start, time, 3)) <= arb(float(cells.jerk[k]))


@settings(max_examples=25, deadline=None)
@given(factors, size, st.floats(1e-3, 1e3))
def test_float_modes(parts: list[tuple[fmpq_poly, int]], zero: object, reach: float) -> None:
    shared = deviation(parts, zero)
    assert_sampled(shared, shared.table, np.linspace(0.0, reach, 9))


@settings(max_examples=15, deadline=None)
@given(factors, size, st.integers(-4, 12))
def test_cells_of_float_modes(parts: list[tuple[fmpq_poly, int]], zero: object, exponent: int) -> None:
    shared = deviation(parts, zero)
    left = 2.0**exponent
    assert_enclosed(shared, cells_between(shared.table, np.linspace(left, 2.0 * left, 9)[None, :]))


@settings(max_examples=15, deadline=None)
@given(factors, size, st.integers(-4, 7), st.integers(1, 6))
def test_taylor_panels(parts: list[tuple[fmpq_poly, int]], zero: object, exponent: int, halvings: int) -> None:
    shared = deviation(parts, zero)
    half = 2.0 ** (exponent - halvings)
    panel = PanelMaker(shared).panel(exact(2.0**exponent), half)
    assert_sampled(shared, panel, np.linspace(0.0, 2.0 * half, 9))
    assert_enclosed(shared, cells_between(panel, np.linspace(0.0, 2.0 * half, 5)[None, :]))


@pytest.mark.parametrize("power", [4, 8, 12])
def test_modes_written_about_a_late_instant(power: int) -> None:
    shared = deviation([(highest_first([fmpq(1), fmpq(1, 10**power), fmpq(1)]), 1)], fmpq(3))
    start = fmpq(10**power) + fmpq(1, 8)
    local = FloatModes.of(shared.at(LOWEST).rebased(start), start)
    assert_sampled(shared, local, np.linspace(0.0, 100.0, 33))


@settings(max_examples=25, deadline=None)
@given(factors, size, st.floats(1e-3, 1e4))
def test_parts_bound_the_tail(parts: list[tuple[fmpq_poly, int]], zero: object, since: float) -> None:
    shared = deviation(parts, zero)
    bound = float(shared.table.parts(np.array([since])).sum()) * (1.0 + 2.0 * shared.table.parts_error)
    for factor in (1.0, 1.1, 1.7, 3.0):
        with working_precision(300):
            assert abs(truth(shared, fmpq(0), since * factor, 0)) <= arb(bound) + arb(1e-300)


def test_radii_of_repeated_poles_are_absolute() -> None:
    """A coefficient that is zero has no relative error: 1/(s+1)^8 against balls where its modes have all but died."""
    shared = deviation([(highest_first([fmpq(1), fmpq(1)]), 8)], fmpq(100))
    assert float_of(shared.offset) > 0.0
    assert_sampled(shared, shared.table, np.array([0.0, 1e-9, 1.0, 40.0, 300.0, 600.0]))
