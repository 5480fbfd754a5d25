"""Ranges of signals: peaks against an independent method, sizes at which a range is just kept, values at rest."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Sequence
from pathlib import Path
from textwrap import dedent

import mpmath
import numpy
import pytest
from flint import fmpq

from specgate.analysis.analyse import analyse
from specgate.compliance.assumptions import Assumption, Assumptions
from specgate.intake.load import Problems, load
from specgate.terms.verdicts import Standing, Trilean

Assumed = Callable[..., list[Assumption]]

POSITIONER = """
    specgate: 1
    project: {{id: T-1, title: Test, revision: A}}
    subsystems:
      lead:
        input: {{unit: mm}}
        output: {{unit: V}}
        model: {{numerator: [{lead} V*s/mm, {gain} V/mm], denominator: [0.02 s, 1]}}
      stage:
        input: {{unit: V, linear_range: [-1 * {volts} V, {volts} V]}}
        output: {{unit: mm/s, linear_range: [-9 m/s, 9 m/s]}}
        model: {{gain: 12 mm/s/V, lags: [0.3 s]}}
      slide: {{input: {{unit: mm/s}}, output: {{unit: mm}}, model: {{gain: 1, integrators: 1}}}}
    loops:
      table:
        inputs: {{demand: {{unit: mm}}}}
        signals: {{call: lead(demand - place), speed: stage(call), place: slide(speed)}}
        responses: {{move: {{from: demand, to: place, input: step, size: {size}}}}}
"""


@pytest.fixture
def assumed(tmp_path: Path) -> Assumed:
    """Return a function from the text of a project, a loop and a response to the ranges that it rests on."""

    def found(text: str, loop: str, response: str) -> list[Assumption]:
        path = tmp_path / "specgate.yaml"
        path.write_text(dedent(text))
        project = load(path)
        assert not isinstance(project, Problems), [one.message for one in project.findings]
        return list(Assumptions(project, analyse(project)).of_response(loop, response))

    return found


def reached(assumption: Assumption) -> float:
    return float(assumption.peak.answer.enclose(128))


def peak_by_residues(numerator: Sequence[mpmath.mpf], denominator: Sequence[mpmath.mpf]) -> mpmath.mpf:
    """Return sup |y| of the unit step response, t >= 0: residues in 40 digits, turns seeded by a float scan."""
    bottom = numpy.polynomial.Polynomial([float(c) for c in reversed(denominator)])
    poles = [mpmath.findroot(lambda s: horner(denominator, s), mpmath.mpmathify(complex(p))) for p in bottom.roots()]
    lead = denominator[0]
    parts = [(p, horner(numerator, p) / (p * lead * mpmath.fprod(p - q for q in poles if q is not p))) for p in poles]
    static = numerator[-1] / denominator[-1]

    def sum_of(factor: Callable[[mpmath.mpc], mpmath.mpc], t: mpmath.mpf) -> mpmath.mpf:
        return sum(mpmath.re(factor(p) * c * mpmath.exp(p * t)) for p, c in parts)

    end = 40 / min(-float(mpmath.re(p)) for p in poles)
    times = numpy.linspace(0, end, 40001)
    slopes = sum((complex(p * c) * numpy.exp(complex(p) * times)).real for p, c in parts)
    turns = [(times[k], times[k + 1]) for k in numpy.flatnonzero(slopes[:-1] * slopes[1:] < 0)]
    summits = [mpmath.findroot(lambda t: sum_of(lambda p: p, t), turn, solver="anderson") for turn in turns]
    heights = [static + sum_of(lambda _: mpmath.mpf(1), t) for t in (mpmath.mpf(0), *summits)]
    return max(map(abs, (static, *heights)))


def horner(polynomial: Sequence[mpmath.mpf], s: mpmath.mpc) -> mpmath.mpc:
    value = mpmath.mpf(0)
    for c in polynomial:
        value = value * s + c
    return value


@pytest.mark.parametrize(("lead", "gain"), [("0.35", "2.1"), ("0.01", "2.7"), ("1.9", "0.4"), ("0", "3.3")])
def test_peaks_inside_a_loop_against_residues(assumed: Assumed, lead: str, gain: str) -> None:
    call, speed = assumed(POSITIONER.format(lead=lead, gain=gain, volts="5", size="7 mm"), "table", "move")
    with mpmath.workdps(40):
        k, g, d = mpmath.mpf(lead), mpmath.mpf(gain), mpmath.mpf("0.02")
        # C = (k s + g)/(d s + 1), P = 12/(s (0.3 s + 1)): call = C/(1 + C P), speed = 12/(0.3 s + 1) call
        closed = [d * mpmath.mpf("0.3"), d + mpmath.mpf("0.3"), 1 + 12 * k, 12 * g]
        top = [k * mpmath.mpf("0.3"), k + g * mpmath.mpf("0.3"), g, mpmath.mpf(0)]
        wanted = 7 * peak_by_residues(top, closed), 7 * peak_by_residues([12 * k, 12 * g, mpmath.mpf(0)], closed)
    assert reached(call) == pytest.approx(float(wanted[0]), rel=1e-12)
    assert 1000 * reached(speed) == pytest.approx(float(wanted[1]), rel=1e-12)


@pytest.mark.parametrize("size", ["7 mm", "-7 mm"])
@pytest.mark.parametrize(("share", "holds"), [("0.999999", Trilean.NO), ("1.000001", Trilean.YES)])
def test_a_range_a_millionth_either_side_of_the_peak(assumed: Assumed, size: str, share: str, holds: Trilean) -> None:
    parts = {"lead": "0.35", "gain": "2.1", "size": size}
    peak = assumed(POSITIONER.format(**parts, volts="5"), "table", "move")[0].peak.answer
    volts = peak.enclose(256).mid().fmpq() * fmpq(int(share.replace(".", "")), 10**6)
    call = assumed(POSITIONER.format(**parts, volts=f"{volts.p} / {volts.q} * 1"), "table", "move")[0]
    assert call.decision.holds is holds


@pytest.mark.parametrize("size", ["2 mm", "0.3 m", "-40 mm"])
def test_at_the_largest_size_the_peak_touches_the_range(assumed: Assumed, size: str) -> None:
    parts = {"lead": "0.35", "gain": "2.1", "volts": "5"}
    first = assumed(POSITIONER.format(**parts, size=size), "table", "move")[0]
    assert first.largest_size is not None
    largest, unit = first.largest_size
    exact = largest.enclose(256).mid().fmpq()
    for millionths, holds in ((-1, Trilean.YES), (1, Trilean.NO)):
        scaled = exact * fmpq(10**6 + millionths, 10**6)
        again = assumed(POSITIONER.format(**parts, size=f"({scaled.p}/{scaled.q} * 1 {unit.symbol})"), "table", "move")[
            0
        ]
        assert again.decision.holds is holds
        assert reached(again) == pytest.approx(5.0, rel=2e-6)


def test_an_exact_touch_is_inside(assumed: Assumed) -> None:
    # without lead the call is greatest at the step itself: 3.3 V/mm * 7 mm at a drive without lag
    text = POSITIONER.format(lead="0", gain="3.3", volts="23.1", size="7 mm").replace("[0.02 s, 1]", "[1]")
    call = assumed(text, "table", "move")[0]
    assert call.peak.answer.exact is not None
    assert (call.decision.holds, call.standing) == (Trilean.YES, Standing.SOUND)
    assert call.factor is not None
    assert call.factor.answer.exact == 1


def test_the_bound_alone_decides_where_it_can(assumed: Assumed) -> None:
    speed = assumed(POSITIONER.format(lead="0.35", gain="2.1", volts="5", size="7 mm"), "table", "move")[1]
    assert speed.decision.holds is Trilean.YES
    assert "peak" not in vars(speed._first)


REST = """
    specgate: 1
    project: {id: T-2, title: Test, revision: A}
    subsystems:
      pump:
        input: {unit: V, linear_range: [0 V, 10 V]}
        output: {unit: l/min, linear_range: [0 l/min, 60 l/min]}
        model: {gain: 6 l/min/V, lags: [1 s]}
      pipe:
        input: {unit: l/min, linear_range: [0 l/min, 99 l/min]}
        output: {unit: l/min}
        model: {numerator: [1], denominator: [2 s, 1]}
      trim:
        input: {unit: V, linear_range: [-1 V, 1 V]}
        output: {unit: V}
        instances: separate
        model: {numerator: [1], denominator: [1 s, 1]}
    loops:
      supply:
        inputs: {call: {unit: V}, extra: {unit: l/min}}
        signals:
          flow: pipe(pump(call + trim(call)) + 2 * extra)
          given: pump(call + trim(call)) + extra
          other: trim(0.5 * call)
        rest: {call: 4 V, extra: 3 l/min, given: 28 l/min}
        responses: {more: {from: call, to: flow, input: step, size: 500 mV}}
"""


def test_values_at_rest_of_what_has_no_name(assumed: Assumed) -> None:
    found = {one.ranged.probe: one.ranged for one in assumed(REST, "supply", "more")}
    litre = fmpq(1, 60000)
    assert {name: one.rest for name, one in found.items()} == {
        "the input of pump": fmpq(8),  # call, and the stationary output of the trim, which is call again
        "the output of pump": 25 * litre,  # what `given` leaves for it, not 6 times 8
        "the input of pipe": 31 * litre,
        "the input of trim": fmpq(4),
        "the input of trim (2)": fmpq(2),
    }
    assert found["the input of trim"].signal == "call"
    assert found["the input of trim (2)"].signal is None


def test_every_use_of_a_subsystem_has_its_own_range(assumed: Assumed) -> None:
    found = {one.ranged.probe: one for one in assumed(REST, "supply", "more")}
    assert found["the input of trim"].at_rest
    assert found["the input of pump"].decision.holds is Trilean.YES
    assert found["the input of pump"].peak.answer.exact is not None
    assert reached(found["the input of pump"]) == 1.0


def test_a_signal_that_stands_still_is_no_assumption(assumed: Assumed) -> None:
    text = REST.replace("from: call", "from: extra").replace("500 mV", "1 l/min")
    assert [one.ranged.probe for one in assumed(text, "supply", "more")] == ["the input of pipe"]


RATES = """
    specgate: 1
    project: {{id: T-3, title: Test, revision: A}}
    subsystems:
      stage:
        input: {{unit: V, rate_range: [-5 V/s, 4 V/s]}}
        output: {{unit: mm/s, rate_range: [-1 m/min/s, 0.9 m/min/s], linear_range: [-3 mm/s, 3 mm/s]}}
        model: {{gain: 12 mm/s/V, lags: [0.3 s, 0.05 s]}}
      slide:
        input: {{unit: mm/s}}
        output: {{unit: mm, linear_range: [-9 m, 9 m]}}
        model: {{gain: 1, integrators: 1}}
    loops:
      table:
        inputs: {{call: {{unit: V}}, push: {{unit: mm/s}}}}
        signals: {{speed: stage(call) + push, place: slide(speed)}}
        responses: {{move: {{to: speed, {drive}}}}}
"""


def by_range(assumptions: list[Assumption]) -> dict[tuple[str, str], Assumption]:
    return {(one.ranged.probe, one.ranged.kind): one for one in assumptions}


def test_a_rate_against_the_closed_form_of_two_lags(assumed: Assumed) -> None:
    found = by_range(assumed(RATES.format(drive="from: call, input: step, size: 0.2 V"), "table", "move"))
    rate = found["the output of stage", "rate_range"]
    # y' = K (exp(-t/T1) - exp(-t/T2)) / (T1 - T2) is greatest at T1 T2 ln(T1/T2) / (T1 - T2)
    with mpmath.workdps(30):
        one, two = mpmath.mpf("0.3"), mpmath.mpf("0.05")
        time = one * two * mpmath.log(one / two) / (one - two)
        greatest = mpmath.mpf("0.0024") * (mpmath.exp(-time / one) - mpmath.exp(-time / two)) / (one - two)
    assert reached(rate) == pytest.approx(float(greatest), rel=1e-13)
    assert rate.ranged.allowed == fmpq(9, 600)
    assert rate.decision.holds is Trilean.YES


def test_a_jump_has_no_rate_that_a_range_could_hold(assumed: Assumed) -> None:
    found = by_range(assumed(RATES.format(drive="from: call, input: step, size: 1 uV"), "table", "move"))
    call = found["the input of stage", "rate_range"]
    assert (call.decision.holds, call.standing, call.factor) == (Trilean.NO, Standing.OUT_OF_RANGE, None)


def test_a_ramp_keeps_a_rate_to_its_end_and_leaves_every_linear_range(assumed: Assumed) -> None:
    found = by_range(assumed(RATES.format(drive="from: call, input: ramp, slope: 4 V/s"), "table", "move"))
    assert found["the input of stage", "rate_range"].decision.holds is Trilean.YES
    place = found["the output of slide", "linear_range"]
    assert (place.decision.holds, place.factor) == (Trilean.NO, None)
    faster = by_range(assumed(RATES.format(drive="from: call, input: ramp, slope: -4.000004 V/s"), "table", "move"))
    call = faster["the input of stage", "rate_range"]
    assert call.decision.holds is Trilean.NO
    assert call.largest_size is not None
    assert (call.largest_size[0].exact, call.largest_size[1].symbol) == (4, "V/s")


def test_several_inputs_are_scaled_together(assumed: Assumed) -> None:
    drive = "inputs: [{from: call, input: pulse, size: 0.1 V, duration: 2 s}, {from: push, input: step, size: 9 m/s}]"
    speed = by_range(assumed(RATES.format(drive=drive), "table", "move"))["the output of stage", "linear_range"]
    assert speed.largest_size is None
    assert speed.factor is not None
    # 1.2 mm/s is all but reached when the pulse ends: 3 mm/s is 2.5 times as much, and some
    assert float(speed.factor.answer.enclose(64)) == pytest.approx(2.5, rel=2e-3)
    assert float(speed.factor.answer.enclose(64)) > 2.5


def test_a_sine_is_taken_at_its_greatest(assumed: Assumed) -> None:
    drive = "from: call, input: sine, amplitude: 0.1 V, frequency: 2 rad/s"
    speed = by_range(assumed(RATES.format(drive=drive), "table", "move"))["the output of stage", "linear_range"]
    gain = abs(12e-3 / ((1 + 0.6j) * (1 + 0.1j)))
    assert reached(speed) >= 0.1 * gain
    assert reached(speed) == pytest.approx(0.1 * gain, rel=0.1)


def test_white_noise_has_no_greatest_value(assumed: Assumed) -> None:
    drive = "from: push, input: white_noise, density: 1 mm^2/s^2/Hz"
    found = assumed(RATES.format(drive=drive), "table", "move")
    assert [one.decision.holds for one in found] == [Trilean.UNKNOWN]
    assert found[0].standing is Standing.INCONCLUSIVE


BELT = """
    specgate: 1
    project: {id: T-4, title: Test, revision: A}
    subsystems:
      belt:
        input: {unit: V, linear_range: [-5 V, 5 V]}
        output: {unit: kg/s, linear_range: [-3 kg/s, 3 kg/s], rate_range: [-1 kg/s/s, 1 kg/s/s]}
        model: {gain: 1 kg/s/V, lags: [2 s], dead_time: 1.5 s}
      trim:
        input: {unit: kg/s}
        output: {unit: V}
        model: {pid: {form: parallel, proportional: 0.4 V*s/kg, integral: 0.3 V/kg}}
    loops:
      feed:
        inputs: {order: {unit: kg/s}}
        signals: {call: trim(order - flow), flow: belt(call)}
        responses: {follow: {from: order, to: flow, input: step, size: 2 kg/s}}
"""


def test_signals_of_a_loop_with_dead_time_against_a_simulation(assumed: Assumed) -> None:
    found = by_range(assumed(BELT, "feed", "follow"))
    step, late = 0.002, 750
    flow, held, calls, flows = 0.0, 0.0, [], [0.0]
    for k in range(20000):  # trapezoidal rule on both states, the dead time a whole number of steps
        calls.append(0.4 * (2 - flow) + 0.3 * held)
        before = calls[k - late] if k >= late else 0.0
        after = calls[k + 1 - late] if k >= late else 0.0  # just before the jump it is still zero
        following = (flow * (1 - step / 4) + step / 4 * (before + after)) / (1 + step / 4)
        held += step * (2 - (flow + following) / 2)
        flow = following
        flows.append(flow)
    rates = [abs(b - a) / step for a, b in itertools.pairwise(flows)]
    assert reached(found["the input of belt", "linear_range"]) == pytest.approx(max(calls), rel=1e-5)
    assert reached(found["the output of belt", "linear_range"]) == pytest.approx(max(flows), rel=1e-5)
    assert reached(found["the output of belt", "rate_range"]) == pytest.approx(max(rates), rel=1e-3)
    assert all(one.decision.holds is Trilean.YES for one in found.values())


SAMPLED = """
    specgate: 1
    project: {id: T-5, title: Test, revision: A}
    subsystems:
      keeper:
        input: {unit: degC, linear_range: [-8 degC, 8 degC]}
        output: {unit: kW, linear_range: [0 kW, 9 kW], rate_range: [-1 kW/s, 1 kW/s]}
        model: {sampled: {period: 2 s, numerator: [0.9 kW/K, -0.85 kW/K], denominator: [1, -1]}}
      bath:
        input: {unit: kW, linear_range: [0 kW, 9 kW]}
        output: {unit: degC, linear_range: [5 degC, 60 degC]}
        model: {gain: 4 K/kW, lags: [40 s]}
    loops:
      warmth:
        inputs: {order: {unit: degC}, draft: {unit: kW}}
        signals: {call: keeper(order - temperature), temperature: bath(call - draft)}
        rest: {order: 37 degC, temperature: 310.15 K, call: 4 kW}
        responses: {warm: {from: order, to: temperature, input: step, size: 2 K}}
"""


def test_signals_of_a_sampled_loop_against_its_recursion(assumed: Assumed) -> None:
    found = by_range(assumed(SAMPLED, "warmth", "warm"))
    kept = math.exp(-2 / 40)
    error, call, temperature, calls, temperatures = 0.0, 0.0, 0.0, [], []
    for _ in range(400):
        before, error = error, 2.0 - temperature
        call += 0.9 * error - 0.85 * before
        temperature = kept * temperature + (1 - kept) * 4 * call
        calls.append(call)
        temperatures.append(temperature)
    # a single lag under a held input moves one way between samples, so that its extremes are at samples
    assert reached(found["the output of keeper", "linear_range"]) == pytest.approx(1000 * max(calls), rel=1e-10)
    assert reached(found["the input of bath", "linear_range"]) == pytest.approx(1000 * max(calls), rel=1e-10)
    assert reached(found["the output of bath", "linear_range"]) == pytest.approx(max(temperatures), rel=1e-10)
    assert found["the output of keeper", "rate_range"].decision.holds is Trilean.NO
    assert found["the output of bath", "linear_range"].ranged.rest == 37
    assert found["the output of keeper", "linear_range"].ranged.signal == "call"
    assert found["the input of keeper", "linear_range"].ranged.rest == 0


def test_a_sampled_block_that_stands_still_is_no_assumption(assumed: Assumed) -> None:
    text = (
        SAMPLED.replace("bath(call - draft)", "bath(draft)")
        .replace("from: order", "from: draft")
        .replace("2 K", "2 kW")
    )
    assert "the output of keeper" in {one.ranged.probe for one in assumed(text, "warmth", "warm")}
    alone = text.replace("order - temperature", "order")
    assert {one.ranged.probe for one in assumed(alone, "warmth", "warm")} == {"the input of bath", "the output of bath"}
