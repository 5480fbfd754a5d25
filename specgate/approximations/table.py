"""The catalogue of approximations: rows of this version, and the names of those that come later."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

from specgate.approximations import (
    bandwidth_from_pair,
    damping_from_phase_margin,
    dead_time_limit,
    delay_margin_from_phase_margin,
    desired_lag,
    distant_zero,
    dominant_pair,
    final_value_theorem,
    first_order_rise,
    first_order_settling,
    half_rule,
    hold_as_delay,
    margins_from_sensitivity,
    near_cancellation,
    overshoot_from_phase_margin,
    pade_dead_time,
    real_poles_settling,
    resonance_from_damping,
    right_half_plane_undershoot,
    right_half_plane_zero_limit,
    rise_from_bandwidth,
    second_order_delay,
    second_order_overshoot,
    second_order_peak_time,
    second_order_rise,
    second_order_rise_full,
    second_order_settling,
    settling_envelope,
    slowest_pole_settling,
    small_tail,
    static_error_constants,
    unstable_pole_limit,
)
from specgate.approximations.approximation import Approximation, Condition

_ROWS = (
    final_value_theorem,
    static_error_constants,
    first_order_settling,
    first_order_rise,
    second_order_settling,
    settling_envelope,
    slowest_pole_settling,
    real_poles_settling,
    second_order_overshoot,
    second_order_peak_time,
    second_order_rise,
    second_order_rise_full,
    second_order_delay,
    dominant_pair,
    distant_zero,
    near_cancellation,
    small_tail,
    right_half_plane_undershoot,
    bandwidth_from_pair,
    resonance_from_damping,
    rise_from_bandwidth,
    damping_from_phase_margin,
    overshoot_from_phase_margin,
    margins_from_sensitivity,
    delay_margin_from_phase_margin,
    pade_dead_time,
    dead_time_limit,
    right_half_plane_zero_limit,
    unstable_pole_limit,
    half_rule,
    desired_lag,
    hold_as_delay,
)

APPROXIMATIONS: Mapping[str, Approximation] = {module.ROW.name: module.ROW for module in _ROWS}
"""Every approximation that this version audits, by its name in the format."""

LATER: Mapping[str, str] = {
    "fast_sampling_as_continuous": "a sampled controller as a continuous one",
    "inner_loop_as_lag": "an inner loop as a single lag",
}
"""Names of the catalogue that are read and kept, and not audited yet: name and what it is."""

BY_RULE: Mapping[str, str] = {"linear_range": "range-exceeded"}
"""Names of the catalogue that estimate no number: name, and the rule that audits it for every response."""


def without_row(name: str) -> str:
    """Say why nothing of a name of the catalogue that has no row is audited where it is named as a basis."""
    if name in BY_RULE:
        return f"{name} estimates no number: the rule {BY_RULE[name]} audits it for every response, named or not"
    return f"{name} is in the catalogue and not audited by this version"


def entry(name: str, variant: str | None = None) -> Approximation:
    """Return an approximation, with the formula of one of its variants. Raises KeyError for an unknown name."""
    row = APPROXIMATIONS[name]
    return row if variant is None else row.taken_as(variant)


def conditions(name: str, measure: str, variant: str | None = None) -> tuple[tuple[Approximation, Condition], ...]:
    """Return every condition on an estimate of `measure`, with the row it belongs to: those of premises first.

    Each row counts once, however often it is a premise. Raises KeyError for a name that is not in the table.
    """
    return tuple(
        (row, condition)
        for row in chain(name, variant)
        for condition in row.conditions
        if not condition.concerns or measure in condition.concerns
    )


def chain(name: str, variant: str | None = None) -> tuple[Approximation, ...]:
    """Return an approximation with all its premises before it. Raises KeyError for an unknown name."""
    return tuple({row.name: row for row in _with_premises(entry(name, variant))}.values())


def stray(names: Sequence[str]) -> str | None:
    """Return the first name of a chain that nothing after it builds on and that drops nothing for what follows.

    Names that are not in the table are taken as they are.
    """
    for place, name in enumerate(names[:-1]):
        row, later = APPROXIMATIONS.get(name), names[place + 1 :]
        built_on = any(other not in APPROXIMATIONS or row in chain(other) for other in later)
        if row is not None and row.reduce is None and not built_on:
            return name
    return None


def _with_premises(row: Approximation) -> Iterator[Approximation]:
    for premise in row.premises:
        yield from _with_premises(APPROXIMATIONS[premise])
    yield row
