"""Loops near wn^2/(s(s + 2 zeta wn)): one integrator, one real pole, all else far beyond the gain crossover."""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Condition, Found
from specgate.approximations.conditions import at_least, at_most, words
from specgate.approximations.figures import SHOWN, combined, quotient, smallest, total
from specgate.approximations.of_loops import CLOSED_LOOP_STABLE, NO_BREAK
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.spots import Spot
from specgate.approximations.viewed import Viewed
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.terms.unit import PI

_NOT_OF_SHAPE = "L is not of this kind"


def phase_margin(viewed: Viewed) -> Answer:
    """Return the phase margin at the break that is looked at, rad, or why there is none."""
    opened = viewed.around
    if opened is None or opened.loop is None:
        return Answer.nothing(NO_BREAK)
    return opened.loop.phase_margin()


def far(opened: OpenedLoop) -> tuple[Spot, ...] | None:
    """Return the poles and zeros of L beyond one integrator and the nearest other pole; None of another kind of L."""
    if opened.transfer is None or any(spot.oscillates for spot in (*opened.poles, *opened.zeros)):
        return None
    integrators = [pole for pole in opened.poles if pole.decay.exact == 0]
    others = sorted(
        (pole for pole in opened.poles if pole.decay.exact != 0),
        key=lambda pole: pole.decay.enclose(SHOWN).mid().fmpq(),
    )
    if len(integrators) != 1 or not others or not others[0].decay.enclose(SHOWN) > 0:
        return None
    return (*others[1:], *opened.zeros) if all(zero.decay.exact != 0 for zero in opened.zeros) else None


def _crossover(opened: OpenedLoop) -> Answer | None:
    """Return the frequency of the only gain crossover; None where there are more."""
    crossings = opened.gain_crossings
    return crossings[0].frequency if len(crossings) == 1 and crossings[0].frequency.absent is None else None


def _whole(viewed: Viewed, _: Arguments, __: fmpq | None) -> Found:
    opened = viewed.around
    return words("at none" if opened is None else f"at `{opened.name}`", opened is not None)


def _margin(viewed: Viewed, _: Arguments, threshold: fmpq | None) -> Found:
    margin = phase_margin(viewed)
    if margin.absent is not None or threshold is None:
        return words("none" if margin.absent is None else margin.absent.reason, False)
    # compared in radians, where a margin of exactly 60 deg is seen as such
    shown = combined(lambda turn: turn * 180 / arb.pi(), margin).enclose(SHOWN)
    return Found(shown, at_most(margin, threshold * PI / 180).holds)


def _kind(viewed: Viewed, _: Arguments, __: fmpq | None) -> Found:
    opened = viewed.around
    fits = opened is not None and far(opened) is not None and _crossover(opened) is not None
    return words("it is" if fits else "it is not", fits)


def _in_crossovers(viewed: Viewed) -> list[Answer] | None:
    """Return the distance of all that is far, in crossover frequencies."""
    opened = viewed.around
    rest, crossover = (None, None) if opened is None else (far(opened), _crossover(opened))
    return None if rest is None or crossover is None else [quotient(spot.distance, crossover) for spot in rest]


def _distance(viewed: Viewed, _: Arguments, threshold: fmpq | None) -> Found:
    distances = _in_crossovers(viewed)
    if distances is None or threshold is None:
        return words(_NOT_OF_SHAPE, False)
    return at_least(smallest(distances), threshold) if distances else words("no other pole or zero", True)


def _crowding(viewed: Viewed, _: Arguments, threshold: fmpq | None) -> Found:
    distances = _in_crossovers(viewed)
    if distances is None or threshold is None:
        return words(_NOT_OF_SHAPE, False)
    return at_most(_sum(distances), threshold)


def _sum(distances: list[Answer]) -> Answer:
    return total([quotient(Answer.of_exact(1), distance) for distance in distances])


_DORF = "R. C. Dorf, R. H. Bishop, Modern Control Systems, chapter 9"

CONDITIONS = (
    Condition(
        key="break",
        name="a declared break shows the whole loop; a response is that of unity negative feedback around it",
        source="derived",
        required="at one of the breaks",
        find=_whole,
    ),
    CLOSED_LOOP_STABLE,
    Condition(
        key="phase_margin",
        name="phase margin, deg",
        source=_DORF,
        required="<= {threshold}",
        find=_margin,
        threshold=fmpq(60),
        tighter="smaller",
    ),
    Condition(
        key="kind",
        name="L is one integrator, one real pole left of the axis, and real poles and zeros beyond; one gain crossover",
        source="derived",
        required="near wn^2/(s(s + 2 zeta wn))",
        find=_kind,
    ),
    Condition(
        key="distance",
        name="other poles and zeros of L at least {threshold} crossover frequencies from the origin",
        source="derived",
        required=">= {threshold}",
        find=_distance,
        threshold=fmpq(10),
    ),
    Condition(
        key="crowding",
        name="sum of crossover frequency over distance of each other pole and zero of L",
        source="derived",
        required="<= {threshold}",
        find=_crowding,
        threshold=fmpq(1, 10),
        tighter="smaller",
    ),
)
"""That the loop is close to the one for which a phase margin tells the damping."""


def stated(viewed: Viewed, alone: tuple[int, int], beside: tuple[int, int]) -> Accuracy | None:
    """Return one of two ranges in thousandths: of the integrator and the pole alone, and with others far away."""
    opened = viewed.around
    rest = None if opened is None else far(opened)
    if rest is None:
        return None
    low, high = beside if rest else alone
    where = "with other poles and zeros at the nearest place allowed" if rest else "L is wn^2/(s(s + 2 zeta wn))"
    return Accuracy(fmpq(low, 1000), fmpq(high, 1000), f"{low / 10:+g} to {high / 10:+g} % ({where})")
