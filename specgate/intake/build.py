"""From the tree of a whole project to the typed Project, as far as it can be built."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import TypeVar

from specgate.intake import evidence, policy, records
from specgate.intake.collect import Collector
from specgate.intake.context import Context, keys, table
from specgate.intake.criteria import evaluation
from specgate.intake.loops import loop, names_of
from specgate.intake.merge import section
from specgate.intake.nodes import Entry, Node, Table
from specgate.intake.requirements import requirement
from specgate.intake.subsystems import parameters, ports_of, subsystem
from specgate.project.types import InputFile, Kept, Project

_Thing = TypeVar("_Thing")


def build(
    root: Table,
    inputs: tuple[InputFile, ...],
    collector: Collector,
    digests: Mapping[str, str],
    *,
    names_known: bool = True,
) -> Project:
    """Build what can be read: parts in which something was reported are left out, or marked as unread.

    digests: of the files of records. names_known: whether all names are there that the project declares, so that an
    unknown one is unknown indeed.
    """
    title = table(root.get("project")) or Table(root.spot, {})
    context = _context(root, title, collector)
    context.digests, context.names_known = digests, names_known
    units = context.units
    context.laid = records.masks(root.get("masks"), context)
    shared = parameters(root.get("parameters"), None, context)
    subsystems = _each(root, "subsystem", lambda entry: subsystem(entry, context), collector)
    loops = _each(root, "loop", lambda entry: loop(entry, context), collector)
    requirements = _each(root, "requirement", lambda entry: requirement(entry, context), collector)
    return Project(
        info=policy.info(title, context),
        parameters=shared,
        subsystems=subsystems,
        loops=loops,
        requirements=requirements,
        gate=policy.gate(root.get("gate")),
        inputs=inputs,
        units=units,
        approximations=policy.thresholds(root.get("approximations"), context),
        documents=records.documents(root.get("documents")),
        evidence=evidence.evidence(root.get("evidence"), context),
        waivers=evidence.waivers(root.get("waivers"), context),
        wording=policy.wording(root.get("wording")),
        decision_rule=records.decision_rule(root.get("decision_rule")),
        model_agreement=records.model_agreement(root.get("model_agreement"), context),
        masks=context.laid,
        evaluate=evaluation(root.get("evaluate")) or "nominal",
        kept=_kept(root, context),
        units_read=tuple(sorted(context.units_read)),
        partial=collector.failed or context.holes > 0,
    )


def is_whole(project: Project, root: Table) -> bool:
    """Whether nothing was left out."""
    found: Mapping[str, Mapping[str, object]] = {
        "parameters": project.parameters,
        "subsystems": project.subsystems,
        "loops": project.loops,
        "requirements": project.requirements,
        "evidence": project.evidence,
        "waivers": project.waivers,
        "documents": project.documents,
        "masks": project.masks,
    }
    return all(len(things) == len(section(root, name)) for name, things in found.items())


def _context(root: Table, title: Table, collector: Collector) -> Context:
    """Collect the names that the project declares."""
    units, lost = policy.own_units(title, collector)
    subsystems = section(root, "subsystems")
    shared = section(root, "parameters")
    return Context(
        collector=collector,
        units=units,
        lost_units=lost,
        shared=frozenset(shared),
        own={name: _parameter_names(entry.value) for name, entry in subsystems.items()},
        ports={name: ports_of(entry.value) for name, entry in subsystems.items()},
        loops={name: names_of(entry.value) for name, entry in section(root, "loops").items()},
        masks=frozenset(section(root, "masks")),
        cases=frozenset(section(root, "cases")),
        evidence=frozenset(section(root, "evidence")),
        stages=policy.stages(title),
    )


def _parameter_names(node: Node) -> frozenset[str]:
    body = table(node)
    return frozenset(keys(body.get("parameters"))) if body is not None else frozenset()


def _each(root: Table, kind: str, read: Callable[[Entry], _Thing | None], collector: Collector) -> dict[str, _Thing]:
    """Read every entry of a section as far as it can be read."""
    found: dict[str, _Thing] = {}
    for key, entry in section(root, f"{kind}s").items():
        if collector.full:
            break
        with collector.about(**{kind: key}):
            thing = read(entry)
        if thing is not None:
            found[key] = thing
    return found


def _kept(root: Table, context: Context) -> dict[str, tuple[Kept, ...]]:
    """Keep the sections that a later version answers."""
    cases = tuple(records.cases(root.get("cases"), context).values())
    return {"cases": cases} if cases else {}
