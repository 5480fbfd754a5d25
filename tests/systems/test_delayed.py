"""Wirings with dead times, solved exactly: worked by hand, or solved again at frequencies in 40 digits."""

from __future__ import annotations

import mpmath
import pytest
from flint import fmpq, fmpq_poly

from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.delayed import DelayedSolution, solve_delayed
from specgate.systems.polynomials import highest_first
from specgate.systems.quasi import Quasi
from specgate.systems.solution import solve

Coefficients = list[int | fmpq]


def form(*terms: tuple[int | fmpq, str]) -> LinearForm:
    return LinearForm(tuple((fmpq(factor), _reference(name)) for factor, name in terms))


def _reference(name: str) -> SignalRef | OutputRef:
    instance, dot, output = name.partition(".")
    return OutputRef(instance, output) if dot else SignalRef(name)


def applied(
    name: str, above: Coefficients, below: Coefficients, late: fmpq | int, *terms: tuple[int | fmpq, str]
) -> Instance:
    block = Block(name, ("u",), ("y",), {("y", "u"): highest_first(above)}, highest_first(below), fmpq(late))
    return Instance(name, block, {"u": form(*terms)})


HALF = fmpq(1, 2)


def cascade(gap: fmpq | int = HALF, sensor: fmpq | int = 0) -> Wiring:
    """PI 1 + 1/s, lag 1/(s + 1) with a dead time, a sensor 1/(s/5 + 1) with one."""
    return Wiring(
        ("demand", "load"),
        (
            applied("pi", [1, 1], [1, 0], 0, (1, "demand"), (-1, "seen")),
            applied("lag", [1], [1, 1], gap, (1, "drive"), (1, "load")),
            applied("sensor", [1], [fmpq(1, 5), 1], sensor, (1, "level")),
        ),
        {"drive": form((1, "pi.y")), "level": form((1, "lag.y")), "seen": form((1, "sensor.y"))},
    )


def test_every_mode_is_in_the_determinant_cancelled_or_not() -> None:
    solution = solve_delayed(cascade(sensor=fmpq(1, 4)))
    rational = fmpq_poly([1, 1]) * fmpq_poly([0, 1]) * fmpq_poly([1, fmpq(1, 5)]) * 5
    loop = fmpq_poly([1, 1]) * 5
    assert solution.determinant == Quasi.of({fmpq(0): rational, fmpq(3, 4): loop})


def test_a_cancelled_mode_is_hidden_from_one_input_and_shown_by_another() -> None:
    solution = solve_delayed(cascade())
    assert solution.channel("demand", "level").hidden == Quasi.rational(fmpq_poly([1, 1]))
    assert solution.channel("load", "level").hidden == Quasi.rational(fmpq_poly([1]))
    assert [component.hidden for component in solution.components] == [Quasi.rational(fmpq_poly([1]))]


def test_the_opened_loop_has_minus_one_as_its_critical_point() -> None:
    opened = solve_delayed(cascade()).open_at("level")
    assert opened.transfer.numerator.terms[0][0] == fmpq(1, 2)
    below = opened.transfer.denominator.undelayed
    assert opened.closed == Quasi.of({fmpq(0): below}) + opened.transfer.numerator
    assert opened.stable is True


@pytest.mark.parametrize("frequency", [0.3, 1.7, 11.0])
def test_channels_are_those_of_the_loop_with_the_value_of_its_dead_times(frequency: float) -> None:
    """At s = j w dead times are numbers: solved again by hand in 40 digits."""
    solution = solve_delayed(cascade(fmpq(2, 3), fmpq(1, 7)))
    with mpmath.workdps(40):
        s = 1j * mpmath.mpf(frequency)
        pi, lag = 1 + 1 / s, mpmath.exp(-s * 2 / 3) / (s + 1)
        sensor = mpmath.exp(-s / 7) / (s / 5 + 1)
        around = 1 + pi * lag * sensor
        for source, target, expected in (
            ("demand", "level", pi * lag / around),
            ("load", "seen", lag * sensor / around),
            ("demand", "drive", pi / around),
        ):
            transfer = solution.channel(source, target).transfer
            found = at(transfer.numerator, s) / at(transfer.denominator, s)
            assert abs(found - expected) < mpmath.mpf(10) ** -35


def at(quasi: Quasi, s: mpmath.mpc) -> mpmath.mpc:
    return sum(
        mpmath.exp(-s * mpmath.mpf(int(delay.p)) / int(delay.q))
        * sum(mpmath.mpf(int(c.p)) / int(c.q) * s**power for power, c in enumerate(p.coeffs()))
        for delay, p in quasi.terms
    )


def two_lanes(first: fmpq, second: fmpq) -> DelayedSolution:
    """Two loops that each hold a dead time, one after the other."""
    return solve_delayed(
        Wiring(
            ("r",),
            (
                applied("a", [1], [1, 0], first, (1, "r"), (-1, "x")),
                applied("b", [1], [1, 0], second, (1, "x"), (-1, "y")),
            ),
            {"x": form((1, "a.y")), "y": form((1, "b.y"))},
        )
    )


def test_components_keep_their_own_dead_time() -> None:
    solution = two_lanes(fmpq(1), fmpq(2))
    assert [component.stable for component in solution.components] == [True, False]
    channel = solution.channel("r", "x")
    assert [component.instances for component in channel.unstable_not_leading] == [("b",)]
    assert channel.stable is True
    assert solution.stable is False


def test_equal_loops_in_series_are_a_double_factor() -> None:
    solution = two_lanes(fmpq(1, 3), fmpq(1, 3))
    one = Quasi.of({fmpq(0): fmpq_poly([0, 1]), fmpq(1, 3): fmpq_poly([1])})
    assert solution.channel("r", "y").transfer.factors == ((one, 2),)


def test_common_multiples_cancel_across_different_dead_times() -> None:
    """(1 - z^2)/(1 - z) with z = e^(-s): a comb of two delays over one of one."""
    wiring = Wiring(
        ("r",),
        (
            applied("short", [1], [1], 1, (1, "out")),
            applied("long", [1], [1], 2, (1, "r")),
        ),
        {"out": form((1, "r"), (-1, "long.y"), (1, "short.y"))},
    )
    transfer = solve_delayed(wiring).channel("r", "out").transfer
    assert transfer.denominator == Quasi.rational(fmpq_poly([1]))
    assert transfer.numerator == Quasi.of({fmpq(0): fmpq_poly([1]), fmpq(1): fmpq_poly([1])})


def test_an_algebraic_loop_is_one_of_what_acts_at_once() -> None:
    def around(late: int) -> DelayedSolution:
        return solve_delayed(
            Wiring(
                ("r",),
                (
                    applied("gain", [1], [1], late, (1, "r"), (1, "y")),
                    applied("aside", [1], [1], 1, (1, "r")),
                ),
                {"y": form((1, "gain.y")), "z": form((1, "aside.y"))},
            )
        )

    assert around(0).algebraic_loop is not None
    assert around(1).algebraic_loop is None


def test_without_dead_time_in_the_way_the_rest_answers() -> None:
    solution = two_lanes(fmpq(0), fmpq(1))
    assert solution.undelayed("r", ("x",))
    assert not solution.undelayed("r", ("y",))


def test_with_each_dead_time_set_to_nothing_the_rational_loop_is_left() -> None:
    """z = 1 in every term."""
    rational = solve(cascade(0, 0)).determinant
    delayed = solve_delayed(cascade(fmpq(731, 1000), fmpq(1, 7))).determinant
    total = fmpq_poly()
    for _, polynomial in delayed.terms:
        total += polynomial
    assert total == rational
