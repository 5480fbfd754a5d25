"""Dimension checks of a whole project, on its expressions as written and with their nominal values."""

from __future__ import annotations

from dataclasses import replace

from specgate.project.blocks import build
from specgate.project.budget_checks import check_budgets
from specgate.project.criterion_checks import check_requirement
from specgate.project.faults import Fault, Faults
from specgate.project.loop_checks import check_loop
from specgate.project.parameters import settle
from specgate.project.record_checks import check_records, with_chosen
from specgate.project.signals import LoopSignals
from specgate.project.subsystem_checks import check_subsystem
from specgate.project.types import Project
from specgate.terms.findings import Finding, in_order


def check(project: Project) -> tuple[Finding, ...]:
    """Return everything that keeps the project from being built, in the order of the files.

    Formulas, models, wires, ranges, what rests and drives the loops, limits, arguments and claims. Names are taken
    as resolved by whoever built the project; one that is not is reported once where it stands.
    """
    values, findings = settle(project)
    found = Faults()
    blocks = {}
    for name, subsystem in project.subsystems.items():
        built = check_subsystem(subsystem, values, found)
        if built is not None:
            blocks[name] = built
    signals = {name: LoopSignals(project, loop, values) for name, loop in project.loops.items()}
    for name in project.loops:
        check_loop(signals[name], blocks, found)
    for requirement in project.requirements.values():
        check_requirement(requirement, signals, values, found)
    check_records(project, signals, values, found)
    check_budgets(project, values, found)
    return in_order((*findings, *found.findings))


def settled(project: Project) -> Project:
    """Return a project that passes the checks, with what only they can tell: units by fit, what records are about."""
    values, _ = settle(project)
    signals = {name: LoopSignals(project, loop, values) for name, loop in project.loops.items()}
    return replace(with_chosen(project, signals, values), units_by_fit=units_by_fit(project))


def units_by_fit(project: Project) -> tuple[str, ...]:
    """Return the subsystems in which plain numbers carry whatever unit fits, in the order of the files."""
    values, _ = settle(project)
    names = []
    for name, subsystem in project.subsystems.items():
        try:
            if build(subsystem, values).by_fit:
                names.append(name)
        except Fault:
            continue
    return tuple(names)
