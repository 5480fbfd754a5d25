"""The table of all rules, in the order in which a reader meets them."""

from __future__ import annotations

from collections.abc import Mapping

from specgate.rules import (
    algebraic_loop,
    approximation_inconclusive,
    approximation_out_of_range,
    claim_disagrees_with_formula,
    dangling_link,
    derivation_cycle,
    fragile_result,
    hidden_from_samples,
    hidden_mode,
    hidden_unstable_mode,
    improper_model,
    measure_does_not_exist,
    not_answered_yet,
    range_exceeded,
    range_undecided,
    requirement_not_met,
    requirement_open,
    requirement_orphan,
    rest_outside_range,
    threshold_loosened,
    unused_subsystem,
    value_without_source,
)
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, in_order

_ROWS = (
    requirement_not_met,
    requirement_open,
    measure_does_not_exist,
    approximation_out_of_range,
    approximation_inconclusive,
    claim_disagrees_with_formula,
    threshold_loosened,
    fragile_result,
    range_exceeded,
    rest_outside_range,
    range_undecided,
    hidden_unstable_mode,
    hidden_mode,
    hidden_from_samples,
    algebraic_loop,
    improper_model,
    requirement_orphan,
    dangling_link,
    derivation_cycle,
    unused_subsystem,
    value_without_source,
    not_answered_yet,
)

RULES: Mapping[str, Rule] = {module.RULE.name: module.RULE for module in _ROWS}
"""Every rule by its slug."""


def findings(facts: Facts) -> tuple[Finding, ...]:
    """Return what all rules have to say, in the order of the places."""
    return in_order(finding for rule in RULES.values() for finding in rule.check(facts))
