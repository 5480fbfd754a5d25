"""The loops of the pilot fermenter by hand, in SI, with the figures that are asked of them."""

from __future__ import annotations

import math

import numpy as np
from closed_loops import Block, Loop, Opened, Step, gain, lag, transfer

RPM, LITRE_A_MINUTE, MILLIBAR, POINT, KILO = math.pi / 30, 1e-3 / 60, 100.0, 0.01, 1e3
SPEED, TORQUE, TRANSFER_RATE = 400 * RPM, 20.4, 220 / 3600
INERTIA, DRAG_SLOPE = 0.25, 2 * TORQUE / SPEED
RATE_BY_SPEED = TRANSFER_RATE * 2.1 * 0.7 / SPEED
UPTAKE = 400e-6 / 1e-3 / 3600
THERMOMETER = transfer([1], [20 * 1.5, 21.5, 1])
POSITIONER = {"a": 1.2, "b": 0.7}


def _controller(
    name: str, proportional: float, integral: float, set_point: str, measured: object, weight: float
) -> tuple[dict[str, Block], dict[str, dict[object, float]], dict[object, float]]:
    """Return blocks and feeds of a controller, and the sum that it puts out."""
    p, i = f"{name}_p", f"{name}_i"
    blocks = {p: gain(proportional), i: transfer([integral], [1, 0])}
    feeds: dict[str, dict[object, float]] = {p: {set_point: weight, measured: -1}, i: {set_point: 1, measured: -1}}
    return blocks, feeds, {p: 1, i: 1}


def _drive(set_point: str, thickening: dict[object, float]) -> tuple[dict, dict, dict]:
    """Return the agitator with its speed controller."""
    blocks, feeds, torque = _controller("speed", 0.052 / RPM, 0.31 / RPM, set_point, "tachometer", 0)
    blocks |= {"drive": lag(0.02), "agitator": transfer([1], [INERTIA, DRAG_SLOPE]), "tachometer": lag(0.04)}
    feeds |= {"drive": {"torque_demand": 1}, "agitator": {"drive": 1, **thickening}, "tachometer": {"speed": 1}}
    return blocks, feeds, {"torque_demand": torque, "speed": {"agitator": 1}}


def agitation(revision: str) -> Loop:
    """The agitator speed loop, the same in both revisions."""
    blocks, feeds, signals = _drive("set_point", {"thickening": -1})
    return Loop(["set_point", "thickening"], blocks, feeds, signals)


def dissolved_oxygen(revision: str) -> Loop:
    """A: the integral time is the lag of the transfer. B: proportional action on the measured value."""
    blocks, feeds, signals = _drive("speed_demand", {})
    k = RPM / POINT
    p, i, weight = (4 * k, 4 * k * TRANSFER_RATE, 1) if revision == "a" else (3 * k, 3 * k / 12, 0)
    more_blocks, more_feeds, speed = _controller("oxygen", p, i, "set_point", "probe", weight)
    blocks |= more_blocks | {
        "dispersion": lag(1.5),
        "transfer": (
            np.array([[-TRANSFER_RATE]]),
            np.array([[RATE_BY_SPEED, -1 / 7.1e-3]]),
            np.eye(1),
            np.zeros((1, 2)),
        ),
        "probe": lag(4),
    }
    feeds |= more_feeds | {
        "dispersion": {"speed": 1},
        "transfer": [{"dispersion": 1}, {"uptake": 1}],
        "probe": {"oxygen": 1},
    }
    signals |= {"speed_demand": speed, "oxygen": {("transfer", 0): 1}}
    return Loop(["set_point", "uptake"], blocks, feeds, signals)


def temperature(revision: str) -> Loop:
    """Broth over jacket; the jacket controller is proportional."""
    broth, jacket, coupling, loss = 200 * 4180 + 90 * 500, 45 * 4180, 1.6 * 500, 20
    p, time, inner = (5, 800, 1500) if revision == "a" else (6, 650, 2500)
    blocks, feeds, demand = _controller("broth", p, p / time, "set_point", "thermometer", 0)
    blocks |= {
        "vessel": (
            np.array([[-coupling / jacket, coupling / jacket], [coupling / broth, -(coupling + loss) / broth]]),
            np.diag([1 / jacket, 1 / broth]),
            np.eye(2),
            np.zeros((2, 2)),
        ),
        "valve": lag(6),
        "thermometer": THERMOMETER,
        "inner": gain(inner),
    }
    feeds |= {
        "vessel": [{"valve": 1}, {"metabolism": 1}],
        "valve": {"duty_demand": 1},
        "thermometer": {"broth": 1},
        "inner": {"jacket_demand": 1, "jacket": -1},
    }
    signals = {
        "jacket_demand": demand,
        "duty_demand": {"inner": 1},
        "jacket": {("vessel", 0): 1},
        "broth": {("vessel", 1): 1},
        "indicated": {"thermometer": 1},
    }
    return Loop(["set_point", "metabolism"], blocks, feeds, signals)


def head_pressure(revision: str) -> Loop:
    """Gas in the head; the valve opens when pressure is high."""
    k, time = (0.7, 10) if revision == "a" else (1.0, 8)
    k *= LITRE_A_MINUTE / MILLIBAR
    blocks, feeds, outflow = _controller("pressure", -k, -k / time, "set_point", "transmitter", 0)
    blocks |= {
        "head": transfer([1], [80e-3 / 101325, 200 * LITRE_A_MINUTE / 151300]),
        "valve": lag(POSITIONER[revision]),
        "transmitter": lag(0.3),
    }
    feeds |= {"head": {"gas": 1, "valve": -1}, "valve": {"outflow_demand": 1}, "transmitter": {"pressure": 1}}
    return Loop(["set_point", "gas"], blocks, feeds, {"outflow_demand": outflow, "pressure": {"head": 1}})


def alone(block: Block) -> Loop:
    """One block, as on the bench."""
    return Loop(["in"], {"block": block}, {"block": {"in": 1}}, {"out": {"block": 1}})


def loops(revision: str) -> dict[str, Loop]:
    """Return the loops whose poles are compared."""
    built = (agitation, dissolved_oxygen, temperature, head_pressure)
    return {build.__name__: build(revision) for build in built}


def responses(revision: str) -> dict[str, tuple[Step, float]]:
    """Return the responses that have figures, each with the unit that it is written in."""
    speed, oxygen, heat, head = loops(revision).values()
    gas = 40 * LITRE_A_MINUTE
    valve = alone(lag(POSITIONER[revision]))
    return {
        "agitation.faster": (speed.step("set_point", "speed", 20 * RPM, 10), RPM),
        "agitation.thicker": (speed.step("thickening", "speed", 2, 10, 0.0), RPM),
        "dissolved_oxygen.raise": (oxygen.step("set_point", "oxygen", 10 * POINT, 400), POINT),
        "dissolved_oxygen.raise_speed": (oxygen.step("set_point", "speed_demand", 10 * POINT, 400), RPM),
        "dissolved_oxygen.feed_pulse": (oxygen.step("uptake", "oxygen", UPTAKE, 400, 0.0), POINT),
        "temperature.warm": (heat.step("set_point", "indicated", 1, 12_000), 1.0),
        "temperature.warm_duty": (heat.step("set_point", "duty_demand", 1, 12_000), KILO),
        "temperature.growth": (heat.step("metabolism", "broth", 1000, 12_000, 0.0), 1.0),
        "head_pressure.raise": (head.step("set_point", "pressure", 50 * MILLIBAR, 250), MILLIBAR),
        "head_pressure.more_gas": (head.step("gas", "pressure", gas, 250, 0.0), MILLIBAR),
        "head_pressure.more_gas_valve": (head.step("gas", "outflow_demand", gas, 250), LITRE_A_MINUTE),
        "bench.probe": (alone(lag(4)).step("in", "out", 50 * POINT, 100), POINT),
        "bench.bath": (alone(THERMOMETER).step("in", "out", 10, 500), 1.0),
        "bench.heater": (alone(lag(6)).step("in", "out", 5000, 150), KILO),
        "bench.outflow": (valve.step("in", "out", 50 * LITRE_A_MINUTE, 30), LITRE_A_MINUTE),
        "bench.transmitter": (alone(lag(0.3)).step("in", "out", 100 * MILLIBAR, 8), MILLIBAR),
    }


def settlings(revision: str) -> dict[str, float]:
    """Return settling times with the bands of the requirements that do not ask for 2 % of the change, in s."""
    found = responses(revision)
    return {
        "PFV-SYS-12": found["dissolved_oxygen.raise"][0].settling(0.5 * POINT),
        "PFV-SYS-14": found["dissolved_oxygen.feed_pulse"][0].settling(1 * POINT),
        "PFV-SUB-54": found["bench.probe"][0].settling(2.5 * POINT),
    }


def breaks(revision: str) -> dict[str, Opened]:
    """Return the loops that are opened."""
    return {
        "agitation.drive": agitation(revision).opened("torque_demand"),
        "dissolved_oxygen.probe": dissolved_oxygen(revision).opened("probe"),
        "temperature.jacket_set": temperature(revision).opened("jacket_demand"),
        "temperature.jacket_loop": temperature(revision).opened("jacket", held=("jacket_demand",)),
        "head_pressure.valve": head_pressure(revision).opened("outflow_demand"),
    }
