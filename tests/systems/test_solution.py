"""Solved wirings, case by case: hidden modes, components, opened loops, feed-through. Worked by hand unless said."""

from __future__ import annotations

from collections.abc import Sequence

import pytest
from flint import fmpq, fmpq_poly

from specgate.systems import error_constants
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.polynomials import highest_first
from specgate.systems.solution import LoopSolution, solve

Term = tuple[int | fmpq, str]


def form(*terms: Term) -> LinearForm:
    """A sum; `block.out` names an output of an instance, anything else a signal or input."""
    return LinearForm(tuple((fmpq(factor), reference(name)) for factor, name in terms))


def reference(name: str) -> SignalRef | OutputRef:
    instance, dot, output = name.partition(".")
    return OutputRef(instance, output) if dot else SignalRef(name)


def applied(name: str, numerator: Sequence[int | fmpq], denominator: Sequence[int | fmpq], *terms: Term) -> Instance:
    block = Block(name, ("u",), ("y",), {("y", "u"): highest_first(numerator)}, highest_first(denominator))
    return Instance(name, block, {"u": form(*terms)})


def wired(inputs: str, instances: Sequence[Instance], **signals: Sequence[Term]) -> LoopSolution:
    return solve(Wiring(tuple(inputs.split()), tuple(instances), {name: form(*sum_) for name, sum_ in signals.items()}))


def poly(*coefficients: int | fmpq) -> fmpq_poly:
    return highest_first(coefficients)


# --- a loop and its figures ------------------------------------------------------------------------------


def hoist() -> LoopSolution:
    """The sluice gate of the specification's example: PI 140 + 60/s, drive 0.042/(1 + 0.085 s), gate 1/s."""
    return wired(
        "demand surge",
        [
            applied("compensator", [140, 60], [1, 0], (1, "demand"), (-1, "position")),
            applied("drive", [fmpq(42, 1000)], [fmpq(85, 1000), 1], (1, "command")),
            applied("gate", [1], [1, 0], (1, "velocity")),
        ],
        command=[(1, "compensator.y")],
        velocity=[(1, "drive.y"), (1, "surge")],
        position=[(1, "gate.y")],
    )


def test_characteristic_polynomial_is_monic_and_whole() -> None:
    solution = hoist()
    assert solution.algebraic_loop is None
    assert solution.determinant == poly(1, fmpq(200, 17), fmpq(1176, 17), fmpq(504, 17))
    assert solution.stable
    (component,) = solution.components
    assert component.signals == ("command", "velocity", "position")
    assert component.instances == ("compensator", "drive", "gate")
    assert component.hidden == 1


def test_channels_share_the_modes_of_the_loop() -> None:
    solution = hoist()
    follow, reject = solution.channel("demand", "position"), solution.channel("surge", "position")
    assert follow.modes == reject.modes == solution.determinant
    assert follow.transfer.numerator == poly(fmpq(1176, 17), fmpq(504, 17))
    assert reject.transfer.numerator == poly(1, fmpq(200, 17), 0)
    assert follow.hidden == reject.hidden == 1
    # -C G/(1 + C H G) with C = (140 s + 60)/s, H = 0.042/(1 + 0.085 s), G = 1/s
    command = solution.channel("surge", "command").transfer.reduced()
    assert command.numerator == -poly(140, 60) * poly(1, fmpq(200, 17))


def test_the_same_open_loop_at_every_signal_of_a_single_loop() -> None:
    solution = hoist()
    expected = poly(1, fmpq(200, 17), 0, 0)
    for signal in ("command", "velocity", "position"):
        opened = solution.open_at(signal)
        assert opened.stable
        assert opened.denominator == expected
        assert opened.numerator == solution.determinant - expected
    transfer = solution.open_at("position").transfer
    assert error_constants.loop_type(transfer) == 2
    assert error_constants.velocity_constant(transfer) is None
    # 60/s * 0.042 * 1/s
    assert error_constants.acceleration_constant(transfer) == fmpq(63, 25)


def test_unknown_names() -> None:
    solution = hoist()
    with pytest.raises(KeyError):
        solution.channel("demand", "pressure")
    with pytest.raises(KeyError):
        solution.channel("position", "velocity")
    with pytest.raises(KeyError):
        solution.open_at("surge")
    with pytest.raises(KeyError):
        wired("r", [], y=[(1, "nothing")])


# --- hidden modes ----------------------------------------------------------------------------------------


def test_unstable_pole_cancelled_before_it_enters() -> None:
    """(s - 1)/(s + 5) before 4/((s - 1)(s + 2)) in a loop: the zero hides the pole at +1 from the demand."""
    solution = wired(
        "r d",
        [
            applied("c", [1, -1], [1, 5], (1, "r"), (-1, "y")),
            applied("g", [4], [1, 1, -2], (1, "u"), (1, "d")),
        ],
        u=[(1, "c.y")],
        y=[(1, "g.y")],
    )
    assert not solution.stable
    follow, reject = solution.channel("r", "y"), solution.channel("d", "y")
    assert follow.hidden == poly(1, -1)
    assert follow.hides_instability
    assert not follow.stable
    assert follow.transfer.reduced().denominator == poly(1, 7, 14)
    # The disturbance enters behind the zero and shows the pole.
    assert reject.hidden == 1
    assert not reject.hides_instability
    assert not reject.stable
    assert solution.components[0].hidden == 1
    assert not solution.open_at("y").stable


def test_integrator_cancelled_by_a_differentiator() -> None:
    """s/(s + 1) before 2/s: no integrator in the response nor in L, but the mode at the origin is there."""
    solution = wired(
        "r",
        [applied("washout", [1, 0], [1, 1], (1, "r"), (-1, "y")), applied("integrator", [2], [1, 0], (1, "washout.y"))],
        y=[(1, "integrator.y")],
    )
    channel, opened = solution.channel("r", "y"), solution.open_at("y")
    assert channel.hidden == poly(1, 0)
    assert channel.hides_instability
    assert channel.transfer.reduced().denominator == poly(1, 3)
    assert opened.denominator == poly(1, 1, 0)
    assert error_constants.loop_type(opened.transfer) == 0
    assert error_constants.position_constant(opened.transfer) == 2
    assert error_constants.velocity_constant(opened.transfer) == 0
    assert [component.hidden for component in solution.components] == [poly(1, 0)]


@pytest.mark.parametrize("order", [1, 2, 4])
def test_block_before_its_inverse_leaves_all_its_modes(order: int) -> None:
    numerator, denominator = [3, *range(2, 2 + order)], [1, *range(5, 5 + order)]
    solution = wired(
        "r",
        [
            applied("block", numerator, denominator, (1, "r")),
            applied("inverse", denominator, numerator, (1, "block.y")),
        ],
        y=[(1, "inverse.y")],
    )
    channel = solution.channel("r", "y")
    reduced = channel.transfer.reduced()
    assert (reduced.numerator, reduced.denominator) == (poly(1), poly(1))
    assert channel.hidden.degree() == 2 * order
    assert channel.hidden == solution.determinant
    assert sum(component.hidden.degree() for component in solution.components) == 2 * order


def test_hidden_modes_count_with_multiplicity() -> None:
    solution = wired(
        "r",
        [applied("zeros", [1, 2, 1], [1, 4, 4], (1, "r")), applied("poles", [1], [1, 3, 3, 1], (1, "zeros.y"))],
        y=[(1, "poles.y")],
    )
    assert solution.channel("r", "y").hidden == poly(1, 2, 1)
    assert [component.hidden for component in solution.components] == [poly(1), poly(1, 2, 1)]


def test_factor_written_on_both_sides_of_a_block_is_kept() -> None:
    """(s + 3)/((s + 3)(s + 1)) as written: the mode at -3 belongs to the loop."""
    solution = wired("r", [applied("b", [1, 3], [1, 4, 3], (1, "r"), (-1, "y"))], y=[(1, "b.y")])
    assert solution.determinant == poly(1, 5, 6)
    assert solution.channel("r", "y").hidden == poly(1, 3)


@pytest.mark.parametrize("turned", [False, True])
def test_only_the_component_that_hides_a_mode_is_named(turned: bool) -> None:
    """Two integrators: one in plain sight of r, one behind a differentiator of d."""
    instances = [
        applied("seen", [1], [1, 0], (1, "r")),
        applied("rate", [1, 0], [1, 9], (1, "d")),
        applied("unseen", [1], [1, 0], (1, "rate.y")),
    ]
    solution = wired(
        "d r" if turned else "r d",
        instances[::-1] if turned else instances,
        a=[(1, "seen.y")],
        b=[(1, "unseen.y")],
    )
    hidden = {component.instances: component.hidden for component in solution.components}
    assert hidden == {("seen",): poly(1), ("rate",): poly(1), ("unseen",): poly(1, 0)}


def test_equal_poles_on_ways_of_their_own_are_not_hidden() -> None:
    """One component with two integrators that r and d reach apart: the common denominator has s once, det P twice."""
    outputs = {("p", "u"): poly(1), ("q", "v"): poly(1)}
    pair = Block("pair", ("u", "v"), ("p", "q"), outputs, poly(1, 0))
    instance = Instance("pair", pair, {"u": form((1, "r")), "v": form((1, "d"))})
    solution = wired("r d", [instance], p=[(1, "pair.p")], q=[(1, "pair.q")])
    assert solution.determinant == poly(1, 0, 0)
    assert [component.hidden for component in solution.components] == [poly(1)]


# --- components, on the way and beside it ----------------------------------------------------------------


def test_display_integrator_beside_the_way_is_reported_and_not_counted() -> None:
    solution = wired(
        "r",
        [applied("lag", [1], [1, 1], (1, "r")), applied("totaliser", [1], [1, 0], (1, "y"))],
        y=[(1, "lag.y")],
        total=[(1, "totaliser.y")],
    )
    channel = solution.channel("r", "y")
    assert channel.stable
    assert channel.modes == poly(1, 1)
    assert [component.instances for component in channel.unstable_not_leading] == [("totaliser",)]
    assert channel.unstable_not_leading[0].signals == ("total",)
    assert channel.unstable_not_reached == ()
    assert not solution.stable
    assert not solution.channel("r", "total").stable


def test_unstable_component_that_leads_to_the_signal_but_is_not_reached() -> None:
    solution = wired(
        "r d",
        [applied("lag", [1], [1, 1], (1, "r")), applied("drift", [1], [1, -1], (1, "d"))],
        y=[(1, "lag.y"), (1, "drift.y")],
    )
    channel = solution.channel("r", "y")
    assert channel.stable
    assert [component.instances for component in channel.unstable_not_reached] == [("drift",)]
    assert channel.unstable_not_leading == ()
    assert channel.transfer.denominator == poly(1, 1)


def test_cascade_of_loops_has_a_component_each_those_upstream_first() -> None:
    solution = wired(
        "r",
        [
            applied("outer", [2], [1, 1], (1, "a"), (-1, "b")),
            applied("first", [3], [1, 0], (1, "r"), (-1, "a")),
        ],
        b=[(1, "outer.y")],
        a=[(1, "first.y")],
    )
    assert [component.signals for component in solution.components] == [("a",), ("b",)]
    assert [component.modes for component in solution.components] == [poly(1, 3), poly(1, 3)]
    assert solution.channel("r", "a").modes == poly(1, 3)
    assert solution.channel("r", "b").modes == poly(1, 6, 9)


def test_no_way_from_input_to_signal() -> None:
    solution = wired("r d", [applied("lag", [1], [1, 1], (1, "r"))], y=[(1, "lag.y")], z=[(2, "d")])
    channel = solution.channel("d", "y")
    assert channel.modes == channel.hidden == 1
    assert channel.transfer.numerator == 0
    assert channel.components == ()
    assert solution.channel("d", "z").transfer.numerator == 2


def test_outputs_over_one_denominator_share_one_set_of_modes() -> None:
    """Position and rate of one plant, both fed back: its two modes are in det P once."""
    plant = Block("plant", ("u",), ("x", "v"), {("x", "u"): poly(1), ("v", "u"): poly(1, 0)}, poly(1, 0, 0))
    arguments = {"u": form((1, "r"), (-4, "x"), (-3, "v"))}
    solution = wired("r", [Instance("plant", plant, arguments)], x=[(1, "plant.x")], v=[(1, "plant.v")])
    assert solution.determinant == poly(1, 3, 4)
    assert solution.open_at("x").denominator == poly(1, 3, 0)
    assert solution.open_at("v").denominator == poly(1, 0, 4)


def test_second_output_outside_the_loop_belongs_to_the_component() -> None:
    plant = Block("plant", ("u",), ("x", "v"), {("x", "u"): poly(1), ("v", "u"): poly(1, 0)}, poly(1, 0, 0))
    arguments = {"u": form((1, "r"), (-1, "c.y"))}
    solution = wired(
        "r",
        [Instance("plant", plant, arguments), applied("c", [3, 4], [1, 5], (1, "x"))],
        x=[(1, "plant.x")],
        v=[(1, "plant.v")],
    )
    (component,) = solution.components
    assert component.modes == poly(1, 5, 3, 4)
    assert solution.channel("r", "v").modes == component.modes
    assert solution.channel("r", "v").hidden == 1


# --- the loop opened -------------------------------------------------------------------------------------


def test_inner_and_outer_loop_opened_where_one_asks() -> None:
    """Rate feedback 3 inside position feedback 4 on 1/s^2."""
    solution = wired(
        "r",
        [applied("rate", [1], [1, 0], (4, "r"), (-4, "x"), (-3, "v")), applied("position", [1], [1, 0], (1, "v"))],
        v=[(1, "rate.y")],
        x=[(1, "position.y")],
    )
    at_x, at_v = solution.open_at("x"), solution.open_at("v")
    assert (at_x.numerator, at_x.denominator) == (poly(4), poly(1, 3, 0))
    assert (at_v.numerator, at_v.denominator) == (poly(3, 4), poly(1, 0, 0))


def test_signal_in_no_loop() -> None:
    opened = wired("r", [applied("lag", [1], [1, 1], (1, "r"))], y=[(1, "lag.y")]).open_at("y")
    assert (opened.numerator, opened.denominator) == (poly(), poly(1))
    assert error_constants.loop_type(opened.transfer) == 0
    assert error_constants.position_constant(opened.transfer) == 0


def test_positive_feedback_has_a_negative_open_loop() -> None:
    opened = wired("r", [applied("lag", [1], [1, 2], (1, "r"), (1, "y"))], y=[(1, "lag.y")]).open_at("y")
    assert (opened.numerator, opened.denominator) == (poly(-1), poly(1, 2))
    assert opened.stable


def test_opening_can_leave_an_algebraic_loop() -> None:
    """y = r + y + z with z = -2 y: closed, y = r/2; with z cut, y = r + y."""
    solution = wired("r", [], y=[(1, "r"), (1, "y"), (1, "z")], z=[(-2, "y")])
    assert solution.algebraic_loop is None
    assert solution.channel("r", "y").transfer.numerator == fmpq(1, 2)
    opened = solution.open_at("z")
    assert opened.algebraic_loop is not None
    assert opened.algebraic_loop.signals == ("y",)
    with pytest.raises(ValueError, match="opened at z"):
        _ = opened.transfer
