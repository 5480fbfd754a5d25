"""The loops of the survey airship by hand, in SI, with the figures that are asked of them."""

from __future__ import annotations

import math

import numpy as np
from closed_loops import Loop, Opened, Step, gain, lag, transfer

DEG, LITRE_A_MINUTE, CUBIC_METRE_AN_HOUR, KILO = math.pi / 180, 1e-3 / 60, 1 / 3600, 1e3
G0 = 9.80665
MASS, VOLUME, RADIUS, AMBIENT = 3600.0, 3000.0, 5.5, 1e5
RELEASE_LIFT = 40 * G0
RELEASE_MOMENT = RELEASE_LIFT * 6
SHRINKAGE = VOLUME / AMBIENT * 12 * 1.5
CROSS_LEAK = {"a": 3 * LITRE_A_MINUTE, "b": 0.6 * LITRE_A_MINUTE}
INCLINOMETER = transfer([2.1**2 + 2.14**2], [1, 4.2, 2.1**2 + 2.14**2])


def pitch_trim(revision: str) -> Loop:
    """Water pumped between tanks turns the airship; B has the damper and no integral action."""
    stiffness, damping, inertia = MASS * G0 * 1.1, 117e3, 720e3
    proportional, integral = 6 * LITRE_A_MINUTE / DEG, 0.02 * LITRE_A_MINUTE / DEG
    blocks = {
        "controller": transfer([proportional, integral], [1, 0]) if revision == "a" else gain(proportional),
        "pump": lag(1.5),
        "tanks": transfer([998.0], [1, 0]),
        "lever": gain(30 * G0),
        "airframe": (
            np.array([[0, 1], [-stiffness / inertia, -damping / inertia]]),
            np.array([[0], [1 / inertia]]),
            np.eye(2),
            np.zeros((2, 1)),
        ),
        "inclinometer": INCLINOMETER,
    }
    feeds = {
        "controller": {"demand": 1, "inclinometer": -1},
        "pump": {"flow_demand": 1},
        "tanks": {"pump": 1, "cross_leak": 1},
        "lever": {"tanks": 1},
        "airframe": {"moment": 1},
        "inclinometer": {"pitch": 1},
    }
    moment = {"lever": 1, "upset": 1}
    if revision == "b":
        blocks |= {"damper": gain(225 / DEG), "thruster": lag(0.5, 22)}
        feeds |= {"damper": {("airframe", 1): 1}, "thruster": {"damper": 1}}
        moment |= {"thruster": -1}
    signals = {"flow_demand": {"controller": 1}, "moment": moment, "pitch": {("airframe", 0): 1}}
    return Loop(["demand", "cross_leak", "upset"], blocks, feeds, signals)


def height_hold(revision: str) -> Loop:
    """A: climb rate held with a leaky integrator. B: a true one, inside a height loop."""
    blocks = {
        "controller": transfer([1500, 1500 * 0.005 + 190], [1, 0.005])
        if revision == "a"
        else transfer([2000, 250], [1, 0]),
        "fans": lag(1.2),
        "heave": transfer([1], [MASS * 1.86, 450]),
        "variometer": lag(0.5),
    }
    feeds = {
        "controller": {"demand": 1, "variometer": -1},
        "fans": {"command": 1},
        "heave": {"fans": 1, "lift": 1},
        "variometer": {"climb": 1},
    }
    signals = {"command": {"controller": 1}, "climb": {"heave": 1}}
    if revision == "b":
        blocks |= {"kinematics": transfer([1], [1, 0]), "altimeter": lag(0.8)}
        feeds |= {
            "controller": {"demand": 0.06, "altimeter": -0.06, "variometer": -1},
            "kinematics": {"climb": 1},
            "altimeter": {"height": 1},
        }
        signals |= {"height": {"kinematics": 1}}
    return Loop(["demand", "lift"], blocks, feeds, signals)


def envelope_pressure(revision: str) -> Loop:
    """A: proportional action on the error. B: on the measured pressure."""
    compliance = VOLUME * (2.5 * RADIUS / 300e3 + 1 / AMBIENT)
    proportional = 60 * CUBIC_METRE_AN_HOUR
    blocks = {
        "proportional": gain(proportional),
        "integral": transfer([proportional / 20], [1, 0]),
        "fan": lag(1.8),
        "envelope": transfer([1], [compliance, 1.2 * CUBIC_METRE_AN_HOUR]),
        "sensor": lag(0.4),
    }
    error = {"set_point": 1, "sensor": -1}
    feeds = {
        "proportional": error if revision == "a" else {"sensor": -1},
        "integral": error,
        "fan": {"flow_demand": 1},
        "envelope": {"fan": 1, "gas_shrinkage": -1},
        "sensor": {"superpressure": 1},
    }
    signals = {"flow_demand": {"proportional": 1, "integral": 1}, "superpressure": {"envelope": 1}}
    return Loop(["set_point", "gas_shrinkage"], blocks, feeds, signals)


def alone(block: object) -> Loop:
    """One block, as on the acceptance bench."""
    return Loop(["in"], {"block": block}, {"block": {"in": 1}}, {"out": {"block": 1}})


def loops(revision: str) -> dict[str, Loop]:
    """Return the loops whose poles are compared."""
    return {
        "pitch_trim": pitch_trim(revision),
        "envelope_pressure": envelope_pressure(revision),
        **({"height_hold": height_hold(revision)} if revision == "b" else {}),
    }


def responses(revision: str) -> dict[str, tuple[Step, float]]:
    """Return the responses that have figures, each with the unit that it is written in."""
    trim, height, pressure = pitch_trim(revision), height_hold(revision), envelope_pressure(revision)
    long = 6000 if revision == "a" else 800
    leak_final = 0.0 if revision == "a" else None
    found = {
        "pitch_trim.nose_up": (trim.step("demand", "pitch", 3 * DEG, long, 3 * DEG), DEG),
        "pitch_trim.pump_call": (trim.step("demand", "flow_demand", 3 * DEG, long, 0.0), LITRE_A_MINUTE),
        "pitch_trim.leakage": (trim.step("cross_leak", "pitch", CROSS_LEAK[revision], long, leak_final), DEG),
        "pitch_trim.release": (trim.step("upset", "pitch", RELEASE_MOMENT, long, 0.0), DEG),
        "height_hold.release_thrust": (height.step("lift", "command", RELEASE_LIFT, 400), 1.0),
        "envelope_pressure.raise": (pressure.step("set_point", "superpressure", 40, 250), 1.0),
        "envelope_pressure.descend": (pressure.step("gas_shrinkage", "superpressure", SHRINKAGE, 300, 0.0), 1.0),
        "envelope_pressure.descend_flow": (
            pressure.step("gas_shrinkage", "flow_demand", SHRINKAGE, 300),
            CUBIC_METRE_AN_HOUR,
        ),
        "acceptance_bench.pump": (alone(lag(1.5)).step("in", "out", 20 * LITRE_A_MINUTE, 40), LITRE_A_MINUTE),
        "acceptance_bench.thruster": (alone(lag(0.5, 22)).step("in", "out", 200, 15), KILO),
        "acceptance_bench.lift": (alone(lag(1.2)).step("in", "out", 800, 35), 1.0),
        "acceptance_bench.air": (alone(lag(1.8)).step("in", "out", 2000 / 3600, 50), CUBIC_METRE_AN_HOUR),
        "acceptance_bench.tilting": (alone(INCLINOMETER).step("in", "out", 5 * DEG, 15), DEG),
        "acceptance_bench.altitude": (alone(lag(0.8)).step("in", "out", 20, 25), 1.0),
        "acceptance_bench.pressure": (alone(lag(0.4)).step("in", "out", 100, 12), 1.0),
    }
    if revision == "a":
        found["height_hold.ascend"] = (height.step("demand", "climb", 0.5, 400), 1.0)
    else:
        found["height_hold.ascend"] = (height.step("demand", "height", 10, 400, 10.0), 1.0)
        found["height_hold.release"] = (height.step("lift", "height", RELEASE_LIFT, 400, 0.0), 1.0)
        found["height_hold.ascend_thrust"] = (height.step("demand", "command", 10, 400, 0.0), 1.0)
    return found


def settlings(revision: str) -> dict[str, float]:
    """Return settling times with the bands of the requirements that do not ask for 2 % of the change, in s."""
    found = responses(revision)
    times = {
        "SAS-SYS-105": found["pitch_trim.release"][0].settling(0.25 * DEG),
        "SAS-SUB-201": found["acceptance_bench.pump"][0].settling(1 * LITRE_A_MINUTE),
    }
    if revision == "b":
        times["SAS-SYS-114"] = found["height_hold.ascend"][0].settling(0.5)
    return times


def breaks(revision: str) -> dict[str, Opened]:
    """Return the loops that are opened."""
    return {
        "pitch_trim.trim": pitch_trim(revision).opened("flow_demand"),
        "height_hold.thrust": height_hold(revision).opened("command"),
        "envelope_pressure.airflow": envelope_pressure(revision).opened("flow_demand"),
    }
