"""What the results of a requirement rest on, by name."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.analysis.analyses import Analyses
from specgate.analysis.reads import parameters_read, read_by
from specgate.compliance.assessment import Assessment
from specgate.compliance.wording import subject_name
from specgate.project.parameters import Values
from specgate.project.types import Budget, Loop, Project
from specgate.terms.records import record


@record
class Resting:
    """What each loop rests on, and what else is needed to say it of a requirement.

    loops: the parameters that the models, ranges, signals and rest values of a loop read, then its subsystems.
    models: the parameters that the model of each subsystem reads.
    driven: the parameters that the declaration of each response of each loop reads.
    """

    loops: Mapping[str, tuple[str, ...]]
    models: Mapping[str, tuple[str, ...]]
    driven: Mapping[str, Mapping[str, tuple[str, ...]]]
    values: Values

    def of(self, assessment: Assessment) -> tuple[str, ...]:
        """Return the parameters and subsystems, then the responses, breaks and loops, that the criteria rest on."""
        subjects = [one.criterion.subject for one in assessment.criteria]
        loops = dict.fromkeys(subject.loop for subject in subjects)
        below = (one for loop in loops for one in self.loops[loop])
        driven = (
            self.driven[subject.loop][subject.name]
            for subject in subjects
            if subject.kind == "response" and subject.name is not None
        )
        asked = (read_by(one.criterion, None, self.values) for one in assessment.criteria)
        read = (name for names in (*driven, *asked) for name in names)
        shared = self._budgeted(assessment.requirement.budget)
        return tuple(dict.fromkeys((*below, *read, *shared, *(subject_name(one) for one in assessment.criteria))))

    def _budgeted(self, budget: Budget | None) -> Iterator[str]:
        """Give what a budget reads, the blocks whose phases it adds with what they read, and the shares."""
        if budget is not None:
            yield from read_by(budget, None, self.values)
            for block in budget.blocks:
                yield from (*self.models[block.subsystem], block.subsystem)
            yield from (share.id for share in budget.shares)


def resting(project: Project, analyses: Analyses) -> Resting:
    """Return what the loops of a project rest on."""
    values = analyses.nominal.values
    models = {name: parameters_read(one, values) for name, one in project.subsystems.items()}
    ranges = {
        name: read_by((*one.inputs.values(), *one.outputs.values()), name, values)
        for name, one in project.subsystems.items()
    }
    return Resting(
        loops={
            name: tuple(dict.fromkeys((*_read(project.loops[name], loop.subsystems, models, ranges, values),)))
            for name, loop in analyses.loops.items()
        },
        models=models,
        driven={
            name: {response: read_by(one, None, values) for response, one in loop.responses.items()}
            for name, loop in project.loops.items()
        },
        values=values,
    )


def _read(
    loop: Loop,
    subsystems: tuple[str, ...],
    models: Mapping[str, tuple[str, ...]],
    ranges: Mapping[str, tuple[str, ...]],
    values: Values,
) -> Iterator[str]:
    for block in subsystems:
        yield from models[block]
    for block in subsystems:
        yield from ranges[block]
    yield from read_by((tuple(loop.signals.values()), loop.rest), None, values)
    yield from subsystems
