"""An integrator that is none: a pole so slow against the loop that it looks like one, and leaves a lasting error.

That the loop has no pole at the origin is an exact question, asked of L through the block. The pole counts as slow
where it is a hundredth of the highest gain crossover or less: over 1/crossover what it holds decays by less than 1 %.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import arb, fmpq

from specgate.approximations.figures import SHOWN, product, quotient
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.spots import Spot, spots
from specgate.compliance.compare import sign
from specgate.compliance.model.fact import PER_SECOND, RADIAN_PER_SECOND, RATIO, Figured, ModelAssumption
from specgate.compliance.readings import Reading
from specgate.compliance.wording import figure
from specgate.project.types import Subsystem
from specgate.response.answers import Answer
from specgate.systems.blocks import Block
from specgate.systems.error_constants import loop_type, position_constant
from specgate.terms.precision import working_precision
from specgate.terms.unit import Unit
from specgate.terms.verdicts import Standing, Trilean

SLOW = fmpq(100)
"""How many times slower than the crossover a pole looks like an integrator."""
OF_LASTING_ERRORS = (
    "final_value",
    "steady_state_error",
    "loop_type",
    "poles_at_origin",
    "zeros_at_origin",
    "position_constant",
    "velocity_constant",
    "acceleration_constant",
)
"""Measures that an integrator is counted on for."""


def slowest_pole(block: Block) -> Spot | None:
    """Return the slowest real pole of a block that decays and has none at the origin; None where there is none."""
    if block.denominator.degree() < 1 or block.denominator[0] == 0:
        return None
    found = [one for one in spots(block.denominator) if not one.oscillates and one.decay.enclose(SHOWN) > 0]
    rates = [one.decay.enclose(SHOWN) for one in found]
    return next((one for one, own in zip(found, rates, strict=True) if not any(other < own for other in rates)), None)


def slower_than_any(pole: Spot, crossovers: Sequence[Answer]) -> bool:
    """Whether a pole may be slow enough for some crossover of a declared break; of none, it may be for another.

    A cheap look before the loop is opened at the block: what is not slow against any loop that is looked at is left.
    """
    rate = pole.decay.enclose(SHOWN)
    with working_precision(SHOWN):
        return not crossovers or any(not rate * arb(SLOW) > one.enclose(SHOWN) for one in crossovers)


def quasi_integrator(
    subsystem: Subsystem, pole: Spot, on: str, opened: OpenedLoop, crossover: Reading
) -> ModelAssumption | None:
    """Say of a slow pole that it is no integrator; None where it is not slow, or the loop has one."""
    loop = opened.subject.open_loop
    if not loop.numerator or loop_type(loop) != 0:
        return None
    slow = product(Answer.of_exact(SLOW), pole.decay)
    if any(sign(quotient(slow, one), fmpq(1)) not in (-1, 0) for one in (crossover.answer, crossover.again)):
        return None
    constant = position_constant(loop)
    assert constant is not None
    ratio = quotient(crossover.answer, pole.decay)
    figures = (
        Figured("decay rate of the pole", Reading.once(pole.decay), PER_SECOND),
        Figured("crossover of the loop through it", crossover, RADIAN_PER_SECOND),
        Figured("gain of the loop at zero frequency", Reading.once(Answer.of_exact(constant)), RATIO),
    )
    words = (
        f"{subsystem.name} has no pole at the origin, nor has the loop through it: its pole at "
        f"-{_said(pole.decay, PER_SECOND)} is {_said(ratio, RATIO)} times slower than the crossover of that loop and "
        f"only looks like one; the gain of the loop at zero frequency is {_said(Answer.of_exact(constant), RATIO)}"
    )
    place = subsystem.model_place
    return ModelAssumption("quasi_integrator", on, subsystem.name, Trilean.NO, Standing.SOUND, words, place, figures)


def _said(answer: Answer, unit: Unit) -> str:
    return figure(Reading.once(answer).in_unit(unit), unit)
