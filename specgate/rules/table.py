"""The table of all rules, in the order in which a reader meets them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from specgate.rules import (
    algebraic_loop,
    allocation_unused,
    approximation_inconclusive,
    approximation_out_of_range,
    budget_doubtful,
    budget_overdrawn,
    budget_undecided,
    claim_disagrees_with_formula,
    dangling_link,
    dead_time_as_fraction,
    derivation_cycle,
    document_issues_differ,
    document_unregistered,
    evidence_contradicts_analysis,
    evidence_stale,
    evidence_undecided,
    fragile_result,
    hidden_from_samples,
    hidden_mode,
    hidden_slow_mode,
    hidden_unstable_mode,
    improper_model,
    limit_says_nothing,
    link_stale,
    measure_does_not_exist,
    model_assumed,
    model_beyond_validity,
    near_cancellation_tail,
    not_answered_yet,
    quasi_integrator,
    range_exceeded,
    range_undecided,
    record_altered,
    requirement_childless,
    requirement_not_met,
    requirement_open,
    requirement_orphan,
    requirement_unallocated,
    rest_outside_range,
    stand_in_out_of_range,
    test_disagrees_with_model,
    text_disagrees_with_limit,
    text_duplicate,
    text_to_be_determined,
    text_unverifiable,
    text_without_one_shall,
    threshold_loosened,
    unused_subsystem,
    value_without_source,
    verification_missing,
    verification_without_criterion,
    verification_without_evidence,
    waiver_insufficient,
    waiver_not_in_force,
    waiver_unneeded,
)
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related, in_order, with_use

_ROWS = (
    requirement_not_met,
    requirement_open,
    measure_does_not_exist,
    approximation_out_of_range,
    approximation_inconclusive,
    claim_disagrees_with_formula,
    threshold_loosened,
    limit_says_nothing,
    fragile_result,
    range_exceeded,
    rest_outside_range,
    range_undecided,
    model_beyond_validity,
    model_assumed,
    stand_in_out_of_range,
    dead_time_as_fraction,
    hidden_slow_mode,
    near_cancellation_tail,
    quasi_integrator,
    hidden_unstable_mode,
    hidden_mode,
    hidden_from_samples,
    algebraic_loop,
    improper_model,
    requirement_orphan,
    requirement_childless,
    dangling_link,
    derivation_cycle,
    link_stale,
    text_duplicate,
    text_disagrees_with_limit,
    text_to_be_determined,
    text_without_one_shall,
    text_unverifiable,
    requirement_unallocated,
    allocation_unused,
    unused_subsystem,
    verification_missing,
    verification_without_criterion,
    verification_without_evidence,
    evidence_stale,
    evidence_undecided,
    evidence_contradicts_analysis,
    test_disagrees_with_model,
    record_altered,
    budget_overdrawn,
    budget_undecided,
    budget_doubtful,
    waiver_not_in_force,
    waiver_insufficient,
    waiver_unneeded,
    document_unregistered,
    document_issues_differ,
    value_without_source,
    not_answered_yet,
)

RULES: Mapping[str, Rule] = {module.RULE.name: module.RULE for module in _ROWS}
"""Every rule by its slug."""


def findings(facts: Facts) -> tuple[Finding, ...]:
    """Return what all rules have to say, in the order of the places."""
    found = (finding for rule in RULES.values() for finding in rule.check(facts))
    return in_order(with_use(_with_template(one, facts)) for one in found)


def _with_template(finding: Finding, facts: Facts) -> Finding:
    """Show the template beside a finding at a requirement that is made from one."""
    about = facts.project.requirements.get(finding.requirement or "")
    if about is None or about.template_place is None or finding.place.template is not None:
        return finding
    there = about.template_place
    text = Related(there, f"the text is that of the template `{there.template}`")
    return replace(finding, related=(*finding.related, text))
