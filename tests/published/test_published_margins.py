"""Margins, crossings and peaks printed in textbooks, papers and test suites: `tests/data/published_margins.yaml`.

A printed figure must agree to its last digit; one that the recomputation shows to be off is held to the recomputed
value, and must be seen to disagree. Recomputed values are independent of specgate and have 12 digits. Loops that are
not stable when closed have no margins here; what is printed of them is held against their crossings.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
import yaml
from flint import arb, fmpq, fmpq_poly

from specgate.frequency.rational_gain import RationalGain
from specgate.frequency.rational_loop import RationalLoop
from specgate.response.answers import Answer
from specgate.systems.polynomials import highest_first
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

DATA = Path(__file__).resolve().parents[1] / "data" / "published_margins.yaml"
ROWS: list[dict[str, Any]] = yaml.safe_load(DATA.read_text())
RECOMPUTED_TO = fmpq(1, 10**9)


def exact(number: float | str) -> fmpq:
    """Return the decimal as it is written."""
    mantissa, _, exponent = str(number).lower().partition("e")
    whole, _, decimals = mantissa.partition(".")
    value = fmpq(int(whole + decimals), 10 ** len(decimals))
    return value * fmpq(10) ** int(exponent or 0)


def polynomial(coefficients: list[float]) -> fmpq_poly:
    return highest_first([exact(c) for c in coefficients])


def transfer(system: dict[str, Any]) -> TransferFunction:
    if system["form"] == "loop_tf":
        return TransferFunction(polynomial(system["num"]), polynomial(system["den"]))
    above, below = fmpq_poly(), fmpq_poly([1])
    for term in system["terms"]:
        numerator, denominator = polynomial(term["num"]), polynomial(term["den"])
        above, below = above * denominator + numerator * below, below * denominator
    return TransferFunction(above, below)


def loop(system: dict[str, Any]) -> RationalLoop:
    opened = transfer(system)
    return RationalLoop(opened, is_hurwitz(opened.numerator + opened.denominator))


def closed(system: dict[str, Any]) -> RationalGain:
    opened = transfer(system)
    return RationalGain(TransferFunction(opened.numerator, opened.numerator + opened.denominator))


def where(answer: Answer) -> Answer:
    assert answer.at is not None
    found = answer.at["frequency"]
    assert isinstance(found, Answer)
    return found


def degrees(answer: Answer) -> arb:
    with working_precision(128):
        return answer.enclose(128) * 180 / arb.pi()


def factor(system: dict[str, Any], direction: str) -> arb:
    found = loop(system)
    if found.stable:
        return (found.gain_margin_up() if direction == "up" else found.gain_margin_down()).enclose(128)
    factors = [c.margin for c in found.crossings() if c.kind == "phase" and c.direction == direction]
    return min((one.enclose(128) for one in factors), key=lambda ball: float(ball.mid()))


def phase(system: dict[str, Any]) -> arb:
    """Return the phase margin in degrees, with its sign: negative where a lead uses it up."""
    found = loop(system)
    if found.stable:
        margin = found.phase_margin()
        assert margin.at is not None
        return degrees(margin) * (1 if margin.at["direction"] == "lag" else -1)
    nearest = min((c for c in found.crossings() if c.kind == "gain"), key=lambda c: float(c.margin.enclose(64).mid()))
    return degrees(nearest.margin) * (1 if nearest.direction == "lag" else -1)


READ: dict[str, Callable[[dict[str, Any]], arb]] = {
    "gain_margin": lambda system: factor(system, "up"),
    "gain_reduction_margin": lambda system: 1 / factor(system, "down"),
    "phase_margin_deg": phase,
    "phase_margin_rad": lambda system: loop(system).phase_margin().enclose(128),
    "gain_crossover": lambda system: loop(system).crossover_frequency().enclose(128),
    "phase_crossover": lambda system: loop(system).phase_crossover_frequency().enclose(128),
    "delay_margin": lambda system: loop(system).delay_margin().enclose(128),
    "Ms": lambda system: loop(system).sensitivity_peak().enclose(128),
    "w_Ms": lambda system: where(loop(system).sensitivity_peak()).enclose(128),
    "stability_margin": lambda system: loop(system).least_distance().enclose(128),
    "Mt": lambda system: closed(system).resonance_peak().enclose(128),
    "bandwidth_T": lambda system: closed(system).bandwidth().enclose(128),
    "hinf_norm": lambda system: loop(system).peak_gain().enclose(128),
    "w_peak": lambda system: where(loop(system).peak_gain()).enclose(128),
}


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["id"])
def test_published_value(row: dict[str, Any]) -> None:
    with working_precision(128):
        value = READ[row["quantity"]](row["system"])
        recomputed, printed, tolerance = exact(row["recomputed"]), exact(row["printed"]), exact(row["tolerance"])
        if row["quantity"] != "bandwidth_T":  # recomputed at 1/sqrt(2), not at 10^(-3/20)
            assert abs(value - recomputed) < RECOMPUTED_TO * max(1, abs(recomputed)), (value, row["source"])
        if row["verdict"] == "agrees":
            assert abs(value - printed) < tolerance * (1 + RECOMPUTED_TO), (value, row["source"])
        else:
            assert abs(value - printed) > tolerance, (value, row["source"])


def test_every_row_is_read() -> None:
    assert {row["quantity"] for row in ROWS} == set(READ)
