"""Measures of a loop and of a break, exact at their limits."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import arb, fmpq

from specgate.measures.measure import Arguments
from specgate.measures.subjects import BreakSubject, LoopSubject
from specgate.measures.table import MEASURES
from specgate.response.answers import Answer
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.polynomials import highest_first
from specgate.systems.solution import solve
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

Read = Callable[..., Answer]
ONE = fmpq(1)


def block(name: str, numerator: list[int], denominator: list[fmpq | int]) -> Block:
    return Block(name, ("u",), ("y",), {("y", "u"): highest_first(numerator)}, highest_first(denominator))


def applied(one: Block, *terms: tuple[fmpq | int, str]) -> Instance:
    argument = LinearForm(tuple((fmpq(factor), SignalRef(name)) for factor, name in terms))
    return Instance(one.name, one, {"u": argument})


def loop(instances: list[Instance], signals: dict[str, str]) -> LoopSubject:
    forms = {name: LinearForm(((ONE, OutputRef(instance, "y")),)) for name, instance in signals.items()}
    return LoopSubject(solve(Wiring(("r",), tuple(instances), forms)))


def open_loop(denominator: list[fmpq | int]) -> LoopSubject:
    """Return a loop with these modes and no feedback."""
    return loop([applied(block("plant", [1], denominator), (1, "r"))], {"y": "plant"})


def at_limit(name: str, subject: LoopSubject, limit: fmpq) -> int | None:
    compare = MEASURES[name].at_limit
    assert compare is not None
    return compare(subject, Arguments(), limit)


def close(answer: Answer, expected: Callable[[], arb]) -> bool:
    with working_precision(256):
        return bool(abs(answer.enclose(128) - expected()) < arb("1e-30"))


def test_least_damped_slowest(read: Read) -> None:
    """Poles -0.1, -1 +- 2j and -3 +- j."""
    factors = highest_first([1, fmpq(1, 10)]) * highest_first([1, 2, 5]) * highest_first([1, 6, 10])
    modes = open_loop(list(reversed(factors.coeffs())))
    assert close(read("damping_ratio", modes), lambda: 1 / arb(5).sqrt())
    assert close(read("natural_frequency", modes), lambda: arb(5).sqrt())
    assert close(read("decay_rate", modes), lambda: arb(fmpq(1, 10)))
    assert at_limit("decay_rate", modes, fmpq(1, 10)) == 0
    assert at_limit("natural_frequency", modes, fmpq(2)) == 1


def test_a_range_of_frequencies(read: Read) -> None:
    """Poles -0.1, -1 +- 2j (at sqrt 5), -3 +- 4j (at 5) and -5: both ends of a range count."""
    factors = highest_first([1, fmpq(1, 10)]) * highest_first([1, 2, 5]) * highest_first([1, 6, 25])
    modes = open_loop(list(reversed((factors * highest_first([1, 5])).coeffs())))
    fast = (fmpq(3), fmpq(5))
    assert close(read("damping_ratio", modes, over=fast), lambda: arb(fmpq(3, 5)))
    assert close(read("natural_frequency", modes, over=fast), lambda: arb(5))
    assert close(read("decay_rate", modes, over=fast), lambda: arb(3))
    assert close(read("decay_rate", modes, over=(fmpq(0), fmpq(1))), lambda: arb(fmpq(1, 10)))
    assert close(read("decay_rate", modes, over=(fmpq(5), fmpq(5))), lambda: arb(3))
    assert close(read("natural_frequency", modes, over=(fmpq(1), fmpq(9))), lambda: arb(5).sqrt())
    nothing = read("natural_frequency", modes, over=(fmpq(0), fmpq(1))).absent
    assert nothing is not None
    assert nothing.proved
    assert read("decay_rate", modes, over=(fmpq(5) + fmpq(1, 10**30), fmpq(9))).absent is not None
    compare = MEASURES["decay_rate"].at_limit
    assert compare is not None
    assert compare(modes, Arguments(over=fast), fmpq(1, 10)) is None


@pytest.mark.parametrize(("limit", "sign"), [(fmpq(1, 2), 0), (fmpq(499, 1000), 1), (fmpq(501, 1000), -1)])
def test_a_damping_ratio_of_exactly_one_half(limit: fmpq, sign: int) -> None:
    assert at_limit("damping_ratio", open_loop([1, 1, 1]), limit) == sign
    assert at_limit("natural_frequency", open_loop([1, 1, 1]), 2 * limit) == sign


def test_growing_modes_are_negative(read: Read) -> None:
    growing = open_loop([1, -1, 1])
    assert read("stable", growing).truth is False
    assert read("damping_ratio", growing).enclose(128) < 0
    assert read("decay_rate", growing).enclose(128) < 0


def test_real_poles_do_not_oscillate(read: Read) -> None:
    lags = open_loop([1, 3, 2])
    assert read("natural_frequency", lags).absent is not None
    assert read("damping_ratio", lags).enclose(128).contains(1)


def test_an_integrator_has_no_damping(read: Read) -> None:
    assert read("damping_ratio", open_loop([1, 0])).absent is not None
    assert at_limit("decay_rate", open_loop([1, 0]), fmpq(0)) == 0
    assert read("stable", open_loop([1, 0])).truth is False


def test_a_gain_has_no_poles(read: Read) -> None:
    gain = open_loop([2])
    assert read("decay_rate", gain).absent is not None
    assert read("stable", gain).truth is True


def test_a_cancelled_mode_is_hidden(read: Read) -> None:
    """A controller zero on the plant's pole: (s + 1)/s times 1/(s + 1)."""
    controller, plant = block("controller", [1, 1], [1, 0]), block("plant", [1], [1, 1])
    closed = loop(
        [applied(controller, (1, "r"), (-1, "y")), applied(plant, (1, "c"))], {"c": "controller", "y": "plant"}
    )
    assert read("hidden_modes", closed).exact == 1
    assert read("stable", closed).truth is True
    assert read("hidden_modes", open_loop([1, 3, 2])).exact == 0


def test_an_algebraic_loop_leaves_everything_open(read: Read) -> None:
    """y = r + y: the signal is not determined."""
    gain = block("gain", [1], [1])
    undetermined = loop([applied(gain, (1, "r"), (1, "y"))], {"y": "gain"})
    for name in ("stable", "hidden_modes", "damping_ratio", "decay_rate"):
        absent = read(name, undetermined).absent
        assert absent is not None, name
        assert not absent.proved


def opened(numerator: list[int], denominator: list[int]) -> BreakSubject:
    return BreakSubject(TransferFunction(highest_first(numerator), highest_first(denominator)), Answer.of_truth(True))


def test_error_constants(read: Read) -> None:
    """10 (s + 2)/(s (s + 5)): type 1, velocity constant 4 1/s."""
    drive = opened([10, 20], [1, 5, 0])
    assert read("loop_type", drive).exact == 1
    assert read("velocity_constant", drive).exact == 4
    assert read("acceleration_constant", drive).exact == 0
    position = read("position_constant", drive).absent
    assert position is not None
    assert position.infinite


def test_a_constant_that_falls_without_limit_is_no_infinite_one(read: Read) -> None:
    """-10/(s (s + 5)): s > 0 brings it to minus infinity, which meets no `at_least`."""
    position = read("position_constant", opened([-10], [1, 5, 0])).absent
    assert position is not None
    assert position.proved
    assert not position.infinite
    assert read("velocity_constant", opened([-10], [1, 5, 0])).exact == -2


def test_a_cancelled_integrator_does_not_count(read: Read) -> None:
    assert read("loop_type", opened([1, 0], [1, 1, 0])).exact == 0
    assert read("position_constant", opened([6, 0], [1, 2, 0])).exact == 3
