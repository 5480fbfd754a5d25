"""From the tree of a whole project to the typed Project, as far as it can be built."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import TypeVar

from specgate.intake import evidence, policy, records
from specgate.intake.collect import Collector
from specgate.intake.context import Context, table
from specgate.intake.criteria import evaluation
from specgate.intake.loops import loop, names_of
from specgate.intake.merge import section
from specgate.intake.nodes import Entry, Node, Table
from specgate.intake.requirements import requirement
from specgate.intake.subsystems import find_broken, parameters, ports_of, subsystem
from specgate.project.types import InputFile, Kept, Loop, Project, Requirement
from specgate.terms.units import UnitTable

_Thing = TypeVar("_Thing")


def build(
    root: Table, inputs: tuple[InputFile, ...], collector: Collector, digests: Mapping[str, str]
) -> Project | None:
    """Build what can be built: a part in which something was reported is left out, with everything that needs it.

    digests: of the files of records. None if not even the units are known.
    """
    title = table(root.get("project")) or Table(root.spot, {})
    units = policy.own_units(title, collector)
    if units is None:
        return None
    context = _context(root, title, units, collector)
    context.digests = digests
    context.laid = records.masks(root.get("masks"), context)
    shared = parameters(root.get("parameters"), None, context)
    subsystems = _each(root, "subsystem", lambda entry: subsystem(entry, context), collector)
    built = frozenset(subsystems)
    loops = _each(root, "loop", lambda entry: loop(entry, built, context), collector)
    requirements = _each(root, "requirement", lambda entry: requirement(entry, context), collector)
    return Project(
        info=policy.info(title, context),
        parameters=shared,
        subsystems=subsystems,
        loops=loops,
        requirements=_about(requirements, loops),
        gate=policy.gate(root.get("gate")),
        inputs=inputs,
        units=units,
        approximations=policy.thresholds(root.get("approximations"), context),
        documents=records.documents(root.get("documents")),
        evidence=evidence.evidence(root.get("evidence"), context),
        waivers=evidence.waivers(root.get("waivers"), context),
        decision_rule=records.decision_rule(root.get("decision_rule")),
        model_agreement=records.model_agreement(root.get("model_agreement"), context),
        masks=context.laid,
        evaluate=evaluation(root.get("evaluate")) or "nominal",
        kept=_kept(root, context),
        units_read=tuple(sorted(context.units_read)),
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


def _context(root: Table, title: Table, units: UnitTable, collector: Collector) -> Context:
    """Collect the names that the project declares."""
    subsystems = section(root, "subsystems")
    own = {name: _parameter_nodes(entry.value) for name, entry in subsystems.items()}
    shared = section(root, "parameters")
    context = Context(
        collector=collector,
        units=units,
        shared=frozenset(shared),
        own={name: frozenset(nodes) for name, nodes in own.items()},
        ports={name: ports_of(entry.value) for name, entry in subsystems.items()},
        loops={name: names_of(entry.value) for name, entry in section(root, "loops").items()},
        masks=frozenset(section(root, "masks")),
        cases=frozenset(section(root, "cases")),
        evidence=frozenset(section(root, "evidence")),
        stages=policy.stages(title),
    )
    declared: dict[str, tuple[Node, str | None]] = {name: (entry.value, None) for name, entry in shared.items()}
    for block, nodes in own.items():
        declared |= {f"{block}.{name}": (node, block) for name, node in nodes.items()}
    find_broken(declared, context)
    return context


def _parameter_nodes(node: Node) -> dict[str, Node]:
    body = table(node)
    nodes = table(body.get("parameters")) if body is not None else None
    return {} if nodes is None else {key.value: value for key, value in nodes.items()}


def _each(root: Table, kind: str, read: Callable[[Entry], _Thing | None], collector: Collector) -> dict[str, _Thing]:
    """Read every entry of a section, leaving out those in which something was reported.

    What is not of the right shape is read all the same, for the names and units in it; a key too many does no harm.
    """
    found: dict[str, _Thing] = {}
    for key, entry in section(root, f"{kind}s").items():
        if collector.full:
            break
        with collector.about(**{kind: key}):
            thing = read(entry)
        if thing is not None and (kind, key) not in collector.misshapen:
            found[key] = thing
    return found


def _about(requirements: dict[str, Requirement], loops: dict[str, Loop]) -> dict[str, Requirement]:
    """Leave out the requirements on a loop that could not be built."""
    return {
        name: found
        for name, found in requirements.items()
        if all(criterion.subject.loop in loops for criterion in found.criteria)
    }


def _kept(root: Table, context: Context) -> dict[str, tuple[Kept, ...]]:
    """Keep the sections that a later version answers."""
    cases = tuple(records.cases(root.get("cases"), context).values())
    return {"cases": cases} if cases else {}
