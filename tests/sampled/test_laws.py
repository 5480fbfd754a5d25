"""Laws of sampled loops: scaling of time, short periods, superposition, a delay split between law and actuator."""

from __future__ import annotations

from fractions import Fraction

from flint import fmpq
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.response.inputs import Input
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.step import StepResponse
from specgate.sampled.channel import channel, pieces
from specgate.sampled.drive import drive, step
from specgate.sampled.opened import opened
from specgate.sampled.over_frequency import over_frequency
from specgate.sampled.solution import solve_sampled

from .conftest import Case, exact, form, polynomial

CASE = Case(([2], [1, 3, 2]), (["3/4", "-5/8"], [1, -1]), "1/5", "1/12")


def response(case: Case, source: str = "ask") -> PiecewiseResponse:
    return PiecewiseResponse(
        pieces(channel(solve_sampled(case.wiring()), [source], form(place=1)), step(source, fmpq(1)))
    )


def scaled(case: Case, factor: Fraction) -> Case:
    """The same loop with all times multiplied."""

    def stretched(coefficients: list[Fraction]) -> list[Fraction]:
        top = len(coefficients) - 1
        return [c * factor ** (top - k) for k, c in enumerate(coefficients)]

    above, below = ([Fraction(c) for c in part] for part in case.plant)
    return Case(
        (stretched(above), stretched(below)),
        case.controller,
        Fraction(case.period) * factor,
        Fraction(case.delay) * factor,
    )


@given(st.sampled_from([Fraction(1, 1000), Fraction(3, 7), Fraction(60), Fraction(1001, 3)]))
@settings(max_examples=4, deadline=None)
def test_times_scale_with_the_loop(factor: Fraction) -> None:
    one, other = response(CASE), response(scaled(CASE, factor))
    final = one.final_value().exact
    assert final is not None
    assert other.final_value().exact == final
    first, second = (r.settling(abs(final) / 50).enclose(64) for r in (one, other))
    assert (first * exact(factor)).overlaps(second)
    assert one.greatest().value.enclose(64).overlaps(other.greatest().value.enclose(64))


def test_a_short_period_tends_to_the_continuous_loop() -> None:
    """Errors of settling time, peak and phase margin fall with the period, first order as that of a hold does."""
    plant, gain = (polynomial([2]), polynomial([1, 3, 2, 0])), fmpq(1, 2)
    smooth = StepResponse(plant[0] * gain, plant[1] + plant[0] * gain, fmpq(1))
    settled = float(smooth.settling(fmpq(1, 50)).enclose(64).mid())
    peak = float(smooth.greatest().value.enclose(64).mid())
    errors = []
    for period in (Fraction(1, 5), Fraction(1, 20), Fraction(1, 80)):
        found = response(Case(([2], [1, 3, 2, 0]), (["1/2"], [1]), period))
        errors.append(
            (
                abs(float(found.settling(fmpq(1, 50)).enclose(64).mid()) - settled),
                abs(float(found.greatest().value.enclose(64).mid()) - peak),
            )
        )
    for k in (0, 1):
        first, second, third = (error[k] for error in errors)
        assert third < second < first
        assert 2 < second / third < 8


def test_responses_to_several_inputs_add_up() -> None:
    solution = solve_sampled(CASE.wiring())
    both = [
        ("ask", Input("step", {"size": fmpq(2)})),
        ("load", Input("pulse", {"size": fmpq(1), "duration": fmpq(7, 10)}, fmpq(1, 3))),
    ]
    whole = PiecewiseResponse(pieces(channel(solution, ["ask", "load"], form(place=1)), drive(both)))
    parts = [
        PiecewiseResponse(pieces(channel(solution, [source], form(place=1)), drive([(source, given)])))
        for source, given in both
    ]
    for time in (fmpq(1, 7), fmpq(1, 3), fmpq(4, 5), fmpq(31, 30), fmpq(9, 2)):
        total = sum((part.enclose(time, 128) for part in parts[1:]), parts[0].enclose(time, 128))
        assert total.overlaps(whole.enclose(time, 128))
    assert whole.final_value().exact == 2


def test_a_delay_of_a_period_is_a_power_of_z() -> None:
    late = Case(CASE.plant, CASE.controller, CASE.period, CASE.period)
    shifted = Case(CASE.plant, (["3/4", "-5/8"], [1, -1, 0]), CASE.period)
    for time in (fmpq(1, 3), fmpq(5, 4), fmpq(6)):
        assert response(late).enclose(time, 128).overlaps(response(shifted).enclose(time, 128))
    margins = [over_frequency(opened(solve_sampled(one.wiring()), "place")) for one in (late, shifted)]
    first, second = (one.phase_margin().enclose(64) for one in margins if one is not None)
    assert first.overlaps(second)


def test_the_order_of_blocks_does_not_matter() -> None:
    wiring = CASE.wiring()
    turned = type(wiring)(
        wiring.period,
        type(wiring.continuous)(
            wiring.continuous.inputs,
            wiring.continuous.instances[::-1],
            dict(reversed(list(wiring.continuous.signals.items()))),
        ),
        wiring.instances,
    )
    one, other = (
        PiecewiseResponse(pieces(channel(solve_sampled(w), ["ask"], form(place=1)), step("ask", fmpq(1))))
        for w in (wiring, turned)
    )
    assert one.greatest().value.enclose(128).overlaps(other.greatest().value.enclose(128))
