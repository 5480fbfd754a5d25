"""Piecewise responses that do not settle: against the engine for one piece, and at samples."""

from __future__ import annotations

import pytest
from flint import fmpq, fmpq_poly

from specgate.response.answers import Absent
from specgate.response.inputs import Input, respond
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.questions import Mask
from specgate.response.step import StepResponse
from specgate.response.superposed import Superposed
from specgate.response.superposed.waves import StepWave
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction

S = fmpq_poly([0, 1])
LAG = fmpq_poly([1, 1])
PAIR = highest_first([1, fmpq(1, 2), 4])
SWING = highest_first([1, 0, 9])

SYSTEMS = {
    "sine": (S * 3, PAIR * SWING),
    "sine through a slow lag": (S * 3, fmpq_poly([1, 20]) * SWING),
    "ramp": (fmpq_poly([4]), PAIR * S),
    "falling ramp that starts upward": (highest_first([3, -1]), LAG * LAG * S),
    "parabola": (fmpq_poly([4]), PAIR * S * S),
    "unstable": (fmpq_poly([1]), fmpq_poly([-1, 1]) * LAG),
    "unstable oscillation": (fmpq_poly([1]), highest_first([1, fmpq(-1, 5), 1])),
    "step on an integrator and an oscillator": (fmpq_poly([1]), LAG * highest_first([1, 0, 4])),
}


@pytest.mark.parametrize("name", SYSTEMS)
def test_extremes_are_those_of_the_engine_for_one_piece(name: str) -> None:
    numerator, denominator = SYSTEMS[name]
    reduced = TransferFunction(numerator, denominator).reduced()
    known = StepResponse(numerator, denominator, fmpq(1))
    asked = PiecewiseResponse(Superposed([StepWave(reduced.numerator, reduced.denominator, fmpq(1), fmpq(0))]))
    assert not asked.settles
    for one, other in ((known.greatest(), asked.greatest()), (known.least(), asked.least())):
        if one.value.absent is not None:
            assert other.value.absent is not None
            assert other.value.absent.proved
        elif other.value.absent is not None:
            # what a growing exponential leaves behind is not searched: open, and not denied
            assert name == "unstable"
            assert not other.value.absent.proved
        else:
            assert one.value.enclose(60).overlaps(other.value.enclose(60))
            assert other.value.enclose(60).rad() < 1e-10


def several(*driven: tuple[TransferFunction, Input]) -> PiecewiseResponse:
    """Return the response to several inputs."""
    response = respond(driven)
    assert not isinstance(response, Absent)
    assert isinstance(response, PiecewiseResponse)
    return response


@pytest.mark.parametrize("second", ["step", "sine", "ramp"])
def test_what_is_said_of_sums_holds_at_samples(second: str) -> None:
    quantities = {
        "step": {"size": fmpq(-1)},
        "sine": {"amplitude": fmpq(1), "frequency": fmpq(2)},
        "ramp": {"slope": fmpq(-1, 4)},
    }
    channel = TransferFunction(fmpq_poly([4]), PAIR)
    first = Input("sine", {"amplitude": fmpq(1, 2), "frequency": fmpq(2)})
    later = Input(second, quantities[second], begin=fmpq(7, 4))  # type: ignore[arg-type]
    response = several((channel, first), (channel, later))
    values = [response.enclose(fmpq(k, 10), 64) for k in range(900)]
    for extreme, sign in ((response.greatest(), 1), (response.least(), -1)):
        if extreme.value.absent is not None:
            assert second == "ramp"
            assert sign < 0
            continue
        top = sign * extreme.value.enclose(60)
        highest = max((sign * value).mid().fmpq() for value in values)
        assert all(sign * value.mid().fmpq() <= top.upper().fmpq() for value in values)
        assert top.lower().fmpq() - highest < fmpq(1, 50)


def test_a_mask_for_ever_over_what_swings_for_ever() -> None:
    channel = TransferFunction(fmpq_poly([1]), LAG)
    response = several(
        (channel, Input("sine", {"amplitude": fmpq(1), "frequency": fmpq(1)})),
        (channel, Input("step", {"size": fmpq(1, 2)}, begin=fmpq(1, 3))),
    )
    # 1/2 + 1/sqrt(2) = 1.2071 is approached
    assert response.within(Mask(upper=((fmpq(0), fmpq(1208, 1000)),), forever=True)).truth is True
    assert response.within(Mask(upper=((fmpq(0), fmpq(12, 10)),), forever=True)).truth is False


def test_a_swing_that_is_taken_is_not_said_to_be_only_approached() -> None:
    """y = 1 - cos t: its greatest value 2 is taken at pi."""
    wave = StepWave(fmpq_poly([1]), fmpq_poly([1, 0, 1]), fmpq(1), fmpq(0))
    response = PiecewiseResponse(Superposed([wave]))
    highest = response.greatest()
    assert highest.value.enclose(60).contains(2)
    assert highest.time.absent is None or not highest.time.absent.proved
    at_the_edge = response.within(Mask(upper=((fmpq(0), fmpq(2)),), forever=True))
    assert at_the_edge.truth is None
    assert response.within(Mask(upper=((fmpq(0), fmpq(199, 100)),), forever=True)).truth is False


def test_the_greatest_rate_is_that_of_the_slope() -> None:
    sine = Input("sine", {"amplitude": fmpq(1), "frequency": fmpq(2)}, fmpq(3))
    late = several((TransferFunction(fmpq_poly([1]), LAG), sine)).peak_rate()
    known = StepResponse(S * 2, LAG * highest_first([1, 0, 4]), fmpq(1)).peak_rate()
    assert late.value.enclose(60).overlaps(known.value.enclose(60))
    assert (late.time.enclose(60) - 3).overlaps(known.time.enclose(60))
    pulse = Input("pulse", {"size": fmpq(5), "duration": fmpq(1, 2)})
    twice = several((TransferFunction(fmpq_poly([1]), S * S), pulse)).peak_rate()
    assert (twice.value.exact, twice.time.exact) == (fmpq(5, 2), fmpq(1, 2))
    ramp = Input("ramp", {"slope": fmpq(2)}, fmpq(1))
    step = Input("step", {"size": fmpq(1)})
    climbing = several(
        (TransferFunction(fmpq_poly([1]), LAG), ramp), (TransferFunction(fmpq_poly([1]), PAIR), step)
    ).peak_rate()
    assert climbing.value.enclose(60) > 2


def test_a_growing_rate_has_no_greatest_value() -> None:
    parabola = Input("parabola", {"curvature": fmpq(1)}, fmpq(1))
    found = several((TransferFunction(fmpq_poly([1]), LAG), parabola)).peak_rate().value
    assert found.absent is not None
    assert found.absent.proved
