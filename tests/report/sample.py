"""A hand-written Review of an invented plant (a barley dryer) that holds every state a report can meet.

Figures are consistent with the transfer functions given, but nothing here is computed by specgate.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any

from specgate.review import types as r

FILE = "specgate.yaml"
PARTS = "subsystems/air.yaml"


def place(line: int, column: int = 3, path: str = FILE) -> r.Location:
    return r.Location(path, line, column)


def twelve(value: float) -> float:
    return float(f"{value:.12g}")


def enclosed(measure: str, value: float, unit: str, width: float = 1e-12, **more: Any) -> r.MeasureResult:
    return r.MeasureResult(
        value=twelve(value),
        lower=twelve(value - width),
        upper=twelve(value + width),
        unit=unit,
        proof="enclosed",
        measure=measure,
        **more,
    )


def exact(measure: str, value: float | bool, fraction: str | None, unit: str | None = None) -> r.MeasureResult:
    return r.MeasureResult(value=value, exact=fraction, unit=unit, proof="exact", measure=measure)


def absent(measure: str, reason: str) -> r.MeasureResult:
    return r.MeasureResult(value=None, reason=reason, proof="exact", measure=measure)


def plain(found: r.MeasureResult) -> r.Result:
    return r.Result(
        value=found.value,
        lower=found.lower,
        upper=found.upper,
        exact=found.exact,
        unit=found.unit,
        proof=found.proof,
        reason=found.reason,
        infinite=found.infinite,
        fragile=found.fragile,
        signed=found.signed,
    )


def curve(value: Callable[[float], float], until: float, points: int = 300) -> r.Curve:
    times = [until * (k / points) ** 1.4 for k in range(points + 1)]
    return r.Curve(tuple(float(f"{t:.6g}") for t in times), tuple(float(f"{value(t):.6g}") for t in times))


def amount(value: float, unit: str, written: str | None = None, fraction: str | None = None) -> r.Amount:
    return r.Amount(value, unit, exact=fraction, as_written=written or f"{value:g} {unit}")


# --- the loops ------------------------------------------------------------------------------------------------------

SIZE = 400.0


def _pressure(t: float) -> float:
    pair = math.exp(-5 * t) * (0.85 * math.cos(6 * t) + (4.31 / 6) * math.sin(6 * t))
    return SIZE * (1 - 0.15 * math.exp(-0.4 * t) - pair)


SETTLING = math.log(0.15 / 0.02) / 0.4


def _duct_pressure() -> r.LoopReview:
    follow = r.ResponseReview(
        from_="set_pressure",
        to="pressure",
        input={"kind": "step", "size": "400 Pa"},
        unit="Pa",
        numerator=("5687/500", "6", "122/5"),
        denominator=("1", "52/5", "65", "122/5"),
        measures=(
            exact("final_value", 400.0, "400", "Pa"),
            exact("initial_value", 0.0, "0", "Pa"),
            enclosed("maximum_value", 400.0, "Pa", 1e-9),
            enclosed("settling_time", SETTLING, "s", arguments={"band": "2 % of the change"}),
            enclosed("rise_time", 2.61180339887, "s", arguments={"from": "10 %", "to": "90 %"}),
            r.MeasureResult(value=0.0, lower=0.0, upper=1e-12, unit="%", proof="enclosed", measure="overshoot"),
            absent("peak_time", "the greatest value is only approached, never reached"),
            exact("steady_state_error", 0.0, "0", "Pa"),
            exact("poles_at_origin", 0, None),
            exact("zeros_at_origin", 0, None),
        ),
        poles=(
            r.Pole(-5.0, -6.0, 1, 1e-12),
            r.Pole(-5.0, 6.0, 1, 1e-12),
            r.Pole(-0.4, 0.0, 1, 1e-12),
        ),
        zeros=(r.Pole(-0.263759781921, 1.44105, 1, 1e-9), r.Pole(-0.263759781921, -1.44105, 1, 1e-9)),
        curve=curve(_pressure, 9.0),
    )
    gust = r.ResponseReview(
        from_="leak",
        to="pressure",
        input={"kind": "step", "size": "0.2 m3/s"},
        unit="Pa",
        numerator=("-120", "0"),
        denominator=("1", "52/5", "65", "122/5"),
        measures=(
            exact("final_value", 0.0, "0", "Pa"),
            enclosed("peak_deviation", 2.90181210044, "Pa"),
            enclosed("minimum_value", -2.90181210044, "Pa"),
            exact("zeros_at_origin", 1, None),
        ),
        poles=(r.Pole(-5.0, -6.0, 1, 1e-12), r.Pole(-5.0, 6.0, 1, 1e-12), r.Pole(-0.4, 0.0, 1, 1e-12)),
        zeros=(r.Pole(0.0, 0.0, 1, 0.0),),
        curve=curve(
            lambda t: -6.0 * (math.exp(-0.4 * t) - math.exp(-5 * t) * (math.cos(6 * t) + 0.7 * math.sin(6 * t))), 12.0
        ),
    )
    return r.LoopReview(
        title="Duct pressure loop",
        wiring={
            "opening": "pressure_controller(set_pressure - measured)",
            "flow": "inlet_vane(opening) - leak",
            "pressure": "duct(flow)",
            "measured": "pressure_gauge(pressure)",
        },
        inputs={"set_pressure": "Pa", "leak": "m3/s"},
        signal_units={"opening": "%", "flow": "m3/s", "pressure": "Pa", "measured": "Pa"},
        rest={"pressure": "1200 Pa", "set_pressure": "1200 Pa"},
        subsystems=("pressure_controller", "inlet_vane", "duct", "pressure_gauge"),
        characteristic_polynomial=("1", "52/5", "65", "122/5"),
        poles=(r.Pole(-5.0, -6.0, 1, 1e-12), r.Pole(-5.0, 6.0, 1, 1e-12), r.Pole(-0.4, 0.0, 1, 1e-12)),
        hidden_modes=(),
        measures=(
            exact("stable", True, None),
            exact("hidden_modes", 0, None),
            enclosed("damping_ratio", 5 / math.sqrt(61), "1"),
            exact("decay_rate", 0.4, "2/5", "1/s"),
        ),
        responses={"follow": follow, "reject": gust},
        breaks={
            "main": r.BreakReview(
                at="pressure",
                measures=(
                    exact("loop_type", 1, None),
                    r.MeasureResult(value=None, infinite=True, proof="exact", measure="position_constant"),
                    exact("velocity_constant", 2.35, "47/20", "1/s"),
                    absent("gain_margin", "not answered by this version"),
                ),
                numerator=("47/10", "61/4"),
                denominator=("1", "17/2", "13/2", "0"),
            )
        },
    )


def _fan_speed() -> r.LoopReview:
    settle = math.log(62.5) / 2
    rev = r.ResponseReview(
        from_="set_speed",
        to="speed",
        input={"kind": "step", "size": "60 rpm"},
        unit="rpm",
        numerator=("20",),
        denominator=("1", "12", "20"),
        measures=(
            exact("final_value", 60.0, "60", "rpm"),
            enclosed("settling_time", settle, "s", arguments={"band": "2 % of the change"}),
            r.MeasureResult(value=0.0, exact="0", unit="%", proof="exact", measure="overshoot"),
            enclosed("rise_time", 1.13786, "s", arguments={"from": "10 %", "to": "90 %"}),
        ),
        poles=(r.Pole(-10.0, 0.0, 1, 0.0), r.Pole(-2.0, 0.0, 1, 0.0)),
        curve=curve(lambda t: 60 * (1 - 1.25 * math.exp(-2 * t) + 0.25 * math.exp(-10 * t)), 3.6),
    )
    ring = r.ResponseReview(
        from_="belt_load",
        to="speed",
        input={"kind": "step", "size": "8 N*m"},
        unit="rpm",
        numerator=("-9", "-18"),
        denominator=("1", "12", "20"),
        measures=(enclosed("final_value", -7.2, "rpm"),),
        poles=(r.Pole(-10.0, 0.0, 1, 0.0), r.Pole(-2.0, 0.0, 1, 0.0)),
        zeros=(r.Pole(-2.0, 0.0, 1, 0.0),),
        curve=curve(lambda t: -7.2 * (1 - math.exp(-10 * t)), 1.0),
    )
    return r.LoopReview(
        title="Fan speed loop",
        wiring={"torque": "speed_controller(set_speed - speed)", "speed": "fan(torque - 0.5 belt_load)"},
        inputs={"set_speed": "rpm", "belt_load": "N*m"},
        signal_units={"torque": "N*m", "speed": "rpm"},
        rest={},
        subsystems=("speed_controller", "fan"),
        characteristic_polynomial=("1", "12", "20"),
        poles=(r.Pole(-10.0, 0.0, 1, 0.0), r.Pole(-2.0, 0.0, 1, 0.0)),
        hidden_modes=(r.HiddenMode("load", ("1", "2"), True, (r.Pole(-2.0, 0.0, 1, 0.0),)),),
        measures=(exact("stable", True, None), exact("hidden_modes", 1, None)),
        responses={"speed_change": rev, "load": ring},
        breaks={},
    )


def _grain_temperature() -> r.LoopReview:
    response = r.ResponseReview(
        from_="set_temperature",
        to="grain",
        input={"kind": "step", "size": "5 K"},
        unit="K",
        numerator=("1/50", "1/1000"),
        denominator=("1", "1/4", "0", "0"),
        measures=(
            absent("final_value", "the response has 2 poles at the origin; it grows without limit"),
            absent("settling_time", "the response has no final value"),
            absent("overshoot", "the response has no final value"),
            exact("poles_at_origin", 2, None),
        ),
        poles=(r.Pole(-0.25, 0.0, 1, 0.0), r.Pole(0.0, 0.0, 2, 0.0)),
        curve=curve(lambda t: 0.02 * t + 0.0008 * t * t, 60.0, 120),
    )
    improper = r.ResponseReview(
        from_="moisture",
        to="burner_rate",
        input={"kind": "step", "size": "1 %"},
        unit="K/s",
        numerator=("1", "0"),
        denominator=("1",),
        measures=(),
        reason="the transfer function is improper: it has no step response",
    )
    return r.LoopReview(
        title=None,
        wiring={
            "heat": "temperature_controller(set_temperature - thermocouple(grain)) + feed_forward(moisture)",
            "air": "burner(heat)",
            "grain": "bed(air - heat_loss(grain))",
            "burner_rate": "rate(moisture)",
        },
        inputs={"set_temperature": "K", "moisture": "%"},
        signal_units={"heat": "kW", "air": "K", "grain": "K", "burner_rate": "K/s"},
        rest={"grain": "62 degC"},
        subsystems=("temperature_controller", "thermocouple", "feed_forward", "burner", "bed", "heat_loss", "rate"),
        characteristic_polynomial=("1", "1/4", "0", "0"),
        poles=(r.Pole(-0.25, 0.0, 1, 0.0), r.Pole(0.0, 0.0, 2, 0.0), r.Pole(0.125, 0.0, 1, 1e-12)),
        hidden_modes=(r.HiddenMode("warm_up", ("1", "-1/8"), False, (r.Pole(0.125, 0.0, 1, 1e-12),)),),
        measures=(exact("stable", False, None), exact("hidden_modes", 1, None)),
        responses={"warm_up": response, "moisture_rate": improper},
        breaks={},
    )


def _damper() -> r.LoopReview:
    return r.LoopReview(
        title="Bypass damper loop",
        wiring={"angle": "linkage(demand - angle)"},
        inputs={"demand": "deg"},
        signal_units={"angle": "deg"},
        rest={},
        subsystems=("linkage",),
        characteristic_polynomial=(),
        poles=(),
        hidden_modes=(),
        measures=(),
        responses={},
        breaks={},
        reason="algebraic loop through `angle`: its feed-through is exactly -1, so that no solution exists",
    )


# --- the requirements -----------------------------------------------------------------------------------------------


def criterion(
    measure: str,
    on: str,
    limit: r.LimitReview,
    verdict: str,
    result: r.MeasureResult,
    reserve: r.ReserveReview | None,
    basis: r.BasisReview,
    line: int,
    **more: Any,
) -> r.CriterionReview:
    return r.CriterionReview(
        measure=measure,
        on=on,
        arguments=result.arguments or {},
        limit=limit,
        evaluate="nominal",
        verdict=verdict,
        result=plain(result),
        reserve=reserve,
        basis=basis,
        standing=basis.standing,
        location=place(line, 16),
        **more,
    )


COMPUTED = r.BasisReview("computed", "sound")


def _pair_basis() -> r.BasisReview:
    return r.BasisReview(
        kind="approximation",
        standing="out_of_range",
        chain=("dominant_pair", "second_order_settling"),
        claimed=amount(0.8, "s", "0.8 s", "4/5"),
        formula=amount(0.8, "s", fraction="4/5"),
        formula_text="4/σ = 4/(5 1/s)",
        error=r.ErrorReview(-0.841183420817, "unsafe", amount(-4.23725755135, "s")),
        claim_agrees=True,
        implied={"lower": 0.533333333333, "upper": 0.930232558140},
        accuracy="-14 … +50 % inside the range",
        conditions=(
            r.ConditionReview("pair_exists", "a complex pair exists", "", "yes", "yes", True, "dominant_pair"),
            r.ConditionReview(
                "separation",
                "real parts of all other poles and zeros at least 5 times that of the pair",
                "Nise, Control Systems Engineering, 2015",
                ">= 5",
                0.08,
                False,
                "dominant_pair",
            ),
            r.ConditionReview(
                "damping",
                "damping between 0.1 and 0.9",
                "Ogata, Modern Control Engineering, 2010",
                "0.1 … 0.9",
                twelve(5 / math.sqrt(61)),
                True,
                "second_order_settling",
            ),
            r.ConditionReview(
                "tail",
                "amplitude of the dropped part below the band",
                "",
                "< 0.02",
                None,
                None,
                "dominant_pair",
                policy="tightened by the project from 0.05",
            ),
        ),
        instead=r.InsteadReview("computed", twelve(SETTLING), "s"),
    )


def _inconclusive_basis() -> r.BasisReview:
    return r.BasisReview(
        kind="approximation",
        standing="inconclusive",
        chain=("slowest_pole_settling",),
        claimed=amount(2.0, "s", "2.0 s", "2"),
        formula=amount(2.0, "s", fraction="2"),
        formula_text="4/p₁ = 4/(2 1/s)",
        error=r.ErrorReview(-0.0327081128, "unsafe", amount(-0.06757869, "s")),
        claim_agrees=True,
        implied={"lower": 1.9, "upper": 2.11},
        accuracy="-5 … +5 % inside the range",
        conditions=(
            r.ConditionReview("real", "real poles only", "", "yes", "yes", True, "slowest_pole_settling"),
            r.ConditionReview(
                "ratio",
                "next pole at least 5 times faster",
                "common practice",
                ">= 5",
                5.0,
                True,
                "slowest_pole_settling",
            ),
        ),
        instead=r.InsteadReview("real_poles_settling", 2.06759, "s"),
        reason="the limit 2.1 s lies inside the interval 1.9 to 2.11 s that the stated accuracy leaves",
    )


def _sound_basis() -> r.BasisReview:
    return r.BasisReview(
        kind="approximation",
        standing="sound",
        chain=("real_poles_settling",),
        claimed=amount(2.068, "s", "2.068 s"),
        formula=amount(2.06759, "s"),
        formula_text="[ln(1/0.02) + ln(10/(10-2))]/(2 1/s)",
        error=r.ErrorReview(0.000176, "safe"),
        claim_agrees=True,
        implied={"lower": 1.977, "upper": 2.068},
        accuracy="0 … +4.6 % inside the range",
        conditions=(
            r.ConditionReview("distinct", "distinct real poles", "", "yes", "yes", True, "real_poles_settling"),
        ),
    )


def _slip_basis() -> r.BasisReview:
    return r.BasisReview(
        kind="approximation",
        standing="out_of_range",
        chain=("final_value_theorem",),
        claimed=amount(0.1, "K", "0.1 K"),
        formula=amount(0.02, "K"),
        formula_text="lim s→0 s Y(s)",
        claim_agrees=False,
        conditions=(
            r.ConditionReview(
                "poles_left",
                "all poles of s·Y(s) strictly left of the axis",
                "Chen, Lundberg, Davison, Bernstein, 2007",
                "none on or right of the axis",
                "2 at the origin",
                False,
                "final_value_theorem",
            ),
        ),
        instead=r.InsteadReview("computed", None, "K"),
        reason="the response has no final value",
    )


def _requirement(text: str, line: int, verdict: str, **more: Any) -> r.RequirementReview:
    defaults: dict[str, Any] = {
        "title": None,
        "rationale": None,
        "owner": "Controls",
        "derived_from": (),
        "allocated_to": (),
        "standing": None,
        "decided_by": "criteria",
        "methods": (),
        "criteria": (),
    }
    return r.RequirementReview(text=text, location=place(line), verdict=verdict, **(defaults | more))


def _requirements() -> dict[str, r.RequirementReview]:
    loops = {"duct": _duct_pressure(), "fan": _fan_speed(), "grain": _grain_temperature()}
    follow = loops["duct"].responses["follow"].measures
    speed = loops["fan"].responses["speed_change"].measures
    settling = criterion(
        "settling_time",
        "duct_pressure.follow",
        r.LimitReview(at_most=amount(1.0, "s", "1 s", "1")),
        "non_compliant",
        follow[3],
        r.ReserveReview(twelve(1 - SETTLING), "s", twelve(1 - SETTLING)),
        _pair_basis(),
        112,
        reason="settles in 5.037 s where at most 1 s is allowed",
    )
    close = criterion(
        "settling_time",
        "fan_speed.speed_change",
        r.LimitReview(at_most=amount(2.0676, "s", "2.0676 s", "5169/2500")),
        "compliant",
        speed[1],
        r.ReserveReview(twelve(2.0676 - math.log(62.5) / 2), "s", twelve(1 - math.log(62.5) / 2 / 2.0676)),
        _sound_basis(),
        131,
    )
    loose = criterion(
        "settling_time",
        "fan_speed.speed_change",
        r.LimitReview(at_most=amount(2.1, "s", "2.1 s", "21/10")),
        "compliant",
        speed[1],
        r.ReserveReview(twelve(2.1 - math.log(62.5) / 2), "s", twelve(1 - math.log(62.5) / 2 / 2.1)),
        _inconclusive_basis(),
        125,
    )
    final = criterion(
        "final_value",
        "grain_temperature.warm_up",
        r.LimitReview(within=amount(0.2, "K", "0.2 K", "1/5"), of=amount(5.0, "K", "5 K", "5")),
        "non_compliant",
        loops["grain"].responses["warm_up"].measures[0],
        None,
        _slip_basis(),
        140,
        reason="the response has no final value: 2 poles at the origin",
    )
    margin = criterion(
        "gain_margin",
        "duct_pressure.main",
        r.LimitReview(at_least=amount(6.0, "dB", "6 dB", "6")),
        "open",
        r.MeasureResult(value=None, reason="not answered by this version", measure="gain_margin"),
        None,
        COMPUTED,
        146,
        reason="gain_margin is not answered by this version",
    )
    constant = criterion(
        "position_constant",
        "duct_pressure.main",
        r.LimitReview(at_least=amount(50.0, "1", "50", "50")),
        "compliant",
        loops["duct"].breaks["main"].measures[1],
        r.ReserveReview(None, "1", infinite=True),
        COMPUTED,
        150,
    )
    stable = criterion(
        "stable",
        "duct_pressure",
        r.LimitReview(equals=True),
        "compliant",
        exact("stable", True, None),
        None,
        COMPUTED,
        151,
    )
    sag = criterion(
        "peak_deviation",
        "duct_pressure.reject",
        r.LimitReview(at_most=amount(3.0, "Pa", "3 Pa", "3")),
        "compliant",
        loops["duct"].responses["reject"].measures[1],
        r.ReserveReview(0.09818789956, "Pa", 0.0327292998533),
        COMPUTED,
        152,
    )
    band = criterion(
        "overshoot",
        "fan_speed.speed_change",
        r.LimitReview(between=(amount(0.0, "%", "0 %", "0"), amount(5.0, "%", "5 %", "5"))),
        "compliant",
        speed[2],
        r.ReserveReview(0.0, "%", 0.0),
        COMPUTED,
        153,
    )
    now = (r.MethodReview("analysis", "CDR", "compliant"), r.MethodReview("test", "acceptance", "due_later"))
    failed = (r.MethodReview("analysis", "CDR", "non_compliant"), r.MethodReview("test", "acceptance", "due_later"))
    undecided = (r.MethodReview("analysis", "CDR", "open"), r.MethodReview("inspection", "CDR", "no_record"))
    return {
        "BD-NEED-1": _requirement(
            "The dryer shall not scorch the grain when the fan or the duct is disturbed.",
            80,
            "non_compliant",
            decided_by="derived",
            owner="Plant",
            derived=("BD-SYS-11", "BD-SYS-12", "BD-SYS-13", "BD-SYS-19"),
            reason="BD-SYS-11 and BD-SYS-13 are non-compliant",
        ),
        "BD-NEED-2": _requirement(
            "The dryer shall run unattended through the night.",
            84,
            "open",
            decided_by="derived",
            owner="Plant",
            derived=("BD-SYS-14", "BD-SYS-15"),
            reason="BD-SYS-14 is open",
        ),
        "BD-SYS-11": _requirement(
            "The duct pressure shall settle within 2 % of a 400 Pa step in its set-point in no more than 1 s.",
            110,
            "non_compliant",
            title="Duct pressure settling",
            rationale="Share of the time in which the bed may run without air.",
            derived_from=("BD-NEED-1",),
            allocated_to=("duct_pressure",),
            standing="out_of_range",
            methods=failed,
            criteria=(settling,),
            rests_on=("inlet_vane.gain", "inlet_vane.lag", "pressure_controller", "duct", "duct_pressure.follow"),
            reason="settles in 5.037 s where at most 1 s is allowed",
        ),
        "BD-SYS-12": _requirement(
            "The fan shall reach a new speed within 2.1 s.",
            123,
            "compliant",
            derived_from=("BD-NEED-1",),
            allocated_to=("fan_speed",),
            standing="inconclusive",
            methods=now,
            criteria=(loose,),
            derived=("BD-SUB-31",),
            owner="Drives",
        ),
        "BD-SYS-13": _requirement(
            "The grain temperature shall come to 5 K above its old value, within 0.2 K, after a 5 K step.",
            138,
            "non_compliant",
            derived_from=("BD-NEED-1",),
            allocated_to=("grain_temperature",),
            standing="out_of_range",
            methods=failed,
            criteria=(final,),
            reason="the response has no final value: 2 poles at the origin",
        ),
        "BD-SYS-14": _requirement(
            "The duct pressure loop shall have a gain margin of at least 6 dB.",
            144,
            "open",
            derived_from=("BD-NEED-2",),
            allocated_to=("duct_pressure",),
            standing="sound",
            methods=undecided,
            criteria=(margin,),
            reason="gain_margin is not answered by this version",
        ),
        "BD-SYS-15": _requirement(
            "The duct pressure loop shall be stable, hold its set-point, and keep a leak below 3 Pa.",
            148,
            "compliant",
            derived_from=("BD-NEED-2", "BD-NEED-1"),
            allocated_to=("duct_pressure",),
            standing="sound",
            methods=now,
            criteria=(stable, constant, sag, band),
            waiver=None,
        ),
        "BD-SYS-19": _requirement(
            "The dryer shall carry a second burner.",
            160,
            "not_applicable",
            derived_from=("BD-NEED-1",),
            not_applicable={"reason": "Single-burner variant.", "approved_by": "Plant", "approved_on": "2026-09-02"},
        ),
        "BD-SUB-31": _requirement(
            "The fan drive shall settle within 2.0676 s.",
            130,
            "compliant",
            derived_from=("BD-SYS-12",),
            allocated_to=("fan_speed",),
            standing="sound",
            methods=now,
            criteria=(close,),
            owner="Drives",
        ),
        "BD-SUB-40": _requirement(
            "The damper shall be painted in a colour that can be seen in dust.",
            170,
            "open",
            owner=None,
            decided_by="evidence",
            methods=(r.MethodReview("inspection", "acceptance", "due_later"),),
            reason="no criterion and no evidence",
        ),
    }


FINDINGS = (
    r.FindingReview(
        "value-without-source",
        "note",
        "4 values used in verdicts have no source: fan.inertia, fan.drag, bed.mass, bed.heat. Give each a `source`.",
        place(31, 13, PARTS),
        subsystem="fan",
    ),
    r.FindingReview(
        "hidden-unstable-mode",
        "error",
        "The mode s = 0.125 1/s of `heat_loss` is unstable and does not show in `warm_up`.",
        place(72, 5),
        loop="grain_temperature",
        response="warm_up",
    ),
    r.FindingReview(
        "algebraic-loop",
        "error",
        "The loop bypass_damper has no solution: the feed-through around `angle` is exactly -1.",
        place(90, 7),
        loop="bypass_damper",
        related=(r.Location(PARTS, 55, 5, "linkage is a pure gain of 1"),),
    ),
    r.FindingReview(
        "requirement-not-met",
        "error",
        "BD-SYS-11: settling_time is 5.037 s, limit at most 1 s.",
        place(110, 3),
        requirement="BD-SYS-11",
    ),
    r.FindingReview(
        "approximation-out-of-range",
        "error",
        "BD-SYS-11 rests on second_order_settling outside its range: separation is 0.08, required >= 5.",
        place(112, 16),
        requirement="BD-SYS-11",
    ),
    r.FindingReview(
        "approximation-inconclusive",
        "warning",
        "BD-SYS-12: the limit 2.1 s lies inside what 4/p₁ leaves for the truth.",
        place(125, 16),
        requirement="BD-SYS-12",
    ),
    r.FindingReview(
        "requirement-orphan",
        "error",
        "BD-SUB-40 is derived from nothing. Name its parent in `derived_from`, or say it is a need.",
        place(170, 3),
        requirement="BD-SUB-40",
    ),
)

REASONS = (
    "BD-NEED-1 is not met: BD-SYS-11 and BD-SYS-13 are non-compliant",
    "BD-NEED-2 is open: BD-SYS-14 is open",
    "BD-SYS-11 is not met: settles in 5.037 s where at most 1 s is allowed",
    "BD-SYS-11 rests on an approximation outside its range",
    "BD-SYS-13 is not met: the response has no final value: 2 poles at the origin",
    "BD-SYS-13 rests on an approximation outside its range",
    "BD-SYS-14 is open: gain_margin is not answered by this version",
    "The mode s = 0.125 1/s of `heat_loss` is unstable and does not show in `warm_up`. (specgate.yaml:72:5)",
    "The loop bypass_damper has no solution: the feed-through around `angle` is exactly -1. (specgate.yaml:90:7)",
    "BD-SUB-40 is derived from nothing. Name its parent in `derived_from`, or say it is a need. (specgate.yaml:170:3)",
)


def _specification() -> r.SpecificationReview:
    def subsystem(
        title: str | None, owner: str, model: str, line: int, used: bool = True, **more: Any
    ) -> r.SubsystemReview:
        return r.SubsystemReview(
            title=title,
            owner=owner,
            inputs={"in": "Pa"},
            outputs={"out": "%"},
            model=model,
            numerators={"out": ("1/10", "1/4")},
            numerator=("1/10", "1/4"),
            denominator=("1", "0"),
            reads=more.pop("reads", ()),
            used=used,
            location=place(line, 3, PARTS),
            **more,
        )

    return r.SpecificationReview(
        parameters={
            "inlet_vane.gain": r.ParameterReview(
                0.04,
                "1/25",
                "m3/s/%",
                "0.04 m3/s/%",
                place(12, 13, PARTS),
                {"lower": "-8 %", "upper": "+8 %"},
                "BD-TR-3, table 2",
            ),
            "inlet_vane.lag": r.ParameterReview(
                0.085, "17/200", "s", "85 ms", place(13, 13, PARTS), None, "BD-TR-3, table 3"
            ),
            "fan.inertia": r.ParameterReview(0.31, "31/100", "kg*m2", "0.31 kg*m2", place(31, 13, PARTS)),
        },
        subsystems={
            "pressure_controller": subsystem(
                "Pressure controller", "Controls", "pid, parallel", 5, realised="software"
            ),
            "inlet_vane": subsystem(
                "Inlet vane and actuator",
                "Air",
                "numerator and denominator",
                9,
                reads=("inlet_vane.gain", "inlet_vane.lag"),
            ),
            "fan": subsystem(
                "Main fan", "Drives", "numerator and denominator", 28, reads=("fan.inertia",), by_fit=True
            ),
            "spare_filter": subsystem(None, "Air", "gain and lags", 60, used=False),
        },
        documents={
            "BD-ICD-1": {
                "title": "Interface of burner and fan",
                "issue": "2",
                "date": "2026-03-04",
                "kind": "applicable",
            }
        },
    )


def _definitions() -> dict[str, r.DefinitionReview]:
    def measure(title: str, text: str, source: str | None = None) -> r.DefinitionReview:
        return r.DefinitionReview("measure", title, text, source)

    def approximation(title: str, text: str, source: str | None) -> r.DefinitionReview:
        return r.DefinitionReview("approximation", title, text, source)

    return {
        "settling_time": measure(
            "Settling time",
            "Time from the start of the input until the response is inside the band about its final value for good.",
            "IEC 60050-351:2013, 351-45-37",
        ),
        "overshoot": measure("Overshoot", "Greatest transgression of the final value, in per cent of the change."),
        "final_value": measure("Final value", "The value that the response tends to, as a deviation from rest."),
        "peak_deviation": measure("Peak deviation", "Greatest distance from the value before the step."),
        "rise_time": measure("Rise time", "First arrival at 90 % minus first arrival at 10 % of the change."),
        "stable": measure("Stable", "Every mode of the loop decays, hidden ones included."),
        "gain_margin": measure("Gain margin", "Smallest change of gain that makes the loop unstable."),
        "second_order_settling": approximation(
            "4/σ for a dominant pair", "Settling time of a pair.", "Ogata 2010; Nise 2015"
        ),
        "dominant_pair": approximation("Dominant pair", "Drop every other pole and zero.", "Nise 2015"),
        "slowest_pole_settling": approximation("4/p₁", "Settling by the slowest pole.", None),
        "requirement-orphan": r.DefinitionReview(
            "rule", "Requirement without a parent", "Every requirement below a need has one."
        ),
    }


def review(requirements: Mapping[str, r.RequirementReview] | None = None, **changes: Any) -> r.Review:
    """Return the sample, with other requirements or other fields of the Review where given."""
    chosen = _requirements() if requirements is None else dict(requirements)
    fields: dict[str, Any] = {
        "format": 1,
        "tool": r.ToolReview("specgate", "0.1.0"),
        "project": r.ProjectReview(
            "BD-ANA-021",
            "Barley dryer, air and temperature control",
            "B",
            "2026-10-12",
            "CDR",
            ("PDR", "CDR", "acceptance"),
            ("Prepared by", "Checked by", "Approved by"),
        ),
        "inputs": (r.InputReview(FILE, "5c" * 32), r.InputReview(PARTS, "e0" * 32)),
        "policy": r.PolicyReview(
            ("non_compliant", "out_of_range", "open"),
            "nominal",
            (
                {
                    "approximation": "dominant_pair",
                    "condition": "tail",
                    "catalogue": "0.05",
                    "project": "0.02",
                    "change": "tighter",
                },
            ),
        ),
        "units": ("Pa", "m3/s", "%", "rpm", "N*m", "K", "s", "dB"),
        "specification": _specification(),
        "loops": {
            "duct_pressure": _duct_pressure(),
            "fan_speed": _fan_speed(),
            "grain_temperature": _grain_temperature(),
            "bypass_damper": _damper(),
        },
        "requirements": chosen,
        "trace": {name: item.derived_from for name, item in chosen.items()},
        "definitions": _definitions(),
        "findings": FINDINGS,
        "gate": r.GateReview("hold", REASONS),
    }
    return r.Review(**(fields | changes))


def small() -> r.Review:
    """Return the sample with one loop and what is asked of it."""
    whole = review()
    kept = ("BD-NEED-1", "BD-SYS-11", "BD-SYS-14", "BD-SYS-19")
    return review(
        requirements={name: whole.requirements[name] for name in kept},
        loops={"duct_pressure": whole.loops["duct_pressure"]},
    )


def bare() -> r.Review:
    """Return a review of next to nothing."""
    return review(requirements={}, loops={}, findings=(), definitions={})


def unusable() -> r.Unusable:
    """Return the result of a project that could not be built."""
    return r.Unusable(
        format=1,
        tool=r.ToolReview("specgate", "0.1.0"),
        inputs=(r.InputReview(FILE, "5c" * 32),),
        findings=(
            r.FindingReview(
                "unit-unknown",
                "error",
                "The unit `mm/ss` is unknown; did you mean `mm/s`? Units are listed by `specgate explain units`.",
                place(44, 31),
            ),
            r.FindingReview(
                "id-duplicate",
                "error",
                "The requirement BD-SYS-11 is defined twice.",
                place(120, 3),
                related=(r.Location(FILE, 110, 3, "first defined here"),),
            ),
        ),
        gate=r.GateReview("unusable", ("2 errors in the input",)),
    )
