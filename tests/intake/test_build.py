"""The typed Project: the example of the documentation, and a project that has every key of the format."""

from __future__ import annotations

from pathlib import Path

import pytest
from flint import fmpq

from specgate.intake.load import load
from specgate.project import types
from specgate.project.types import Aim, DecisionRule, Expiry, Project

TESTS = Path(__file__).parents[1]


def loaded(path: Path) -> Project:
    found = load(path)
    assert isinstance(found, Project), [f"{f.place}: {f.message}" for f in found.findings]
    return found


@pytest.fixture(scope="module")
def gate() -> Project:
    """The example of the documentation."""
    return loaded(TESTS / "examples" / "spec_format")


@pytest.fixture(scope="module")
def whole() -> Project:
    """The project with every key."""
    return loaded(TESTS / "intake" / "whole")


def test_the_title_block(gate: Project) -> None:
    info = gate.info
    assert (info.id, info.title, info.revision) == ("GH-ANA-014", "Sluice gate hoist, position control", "A")
    assert (info.date, info.stage, info.stages) == ("2026-11-02", "CDR", ("PDR", "CDR", "acceptance"))
    assert info.sign_off == ("Prepared by", "Checked by", "Approved by")


def test_the_wiring(gate: Project) -> None:
    loop = gate.loops["gate_position"]
    assert {name: signal.as_written for name, signal in loop.signals.items()} == {
        "command": "compensator(demand - position)",
        "velocity": "hoist_drive(command) + surge",
        "position": "gate(velocity)",
    }
    assert list(loop.rest) == ["position", "demand"]
    assert loop.breaks["main"].at == "position"
    follow = loop.responses["follow"]
    assert follow.to == "position"
    assert [(e.source, e.kind, e.quantities["size"].as_written) for e in follow.excitations] == [
        ("demand", "step", "50 mm")
    ]


def test_the_requirements(gate: Project) -> None:
    parent, settle, _, margins = gate.requirements.values()
    assert (parent.decided_by, parent.coverage_complete) == ("derived", True)
    assert [(m.method, m.stage) for m in settle.verification] == [("analysis", "CDR"), ("test", "acceptance")]
    assert settle.basis is not None
    assert settle.basis.chain == ("second_order_settling",)
    (criterion,) = settle.criteria
    assert (criterion.subject.kind, criterion.subject.loop, criterion.subject.name) == (
        "response",
        "gate_position",
        "follow",
    )
    assert (criterion.measure, criterion.limit.kind) == ("settling_time", "at_most")
    assert [c.measure for c in margins.criteria] == ["gain_margin", "phase_margin"]
    assert [m.stage for m in margins.verification] == [None]


def test_the_default_of_the_gate(whole: Project) -> None:
    assert whole.gate.hold_on == ("non_compliant", "out_of_range", "open", "inconclusive")
    bare = loaded(TESTS / "intake" / "bare.yaml")
    assert bare.gate.hold_on == ("non_compliant", "open", "out_of_range")
    assert bare.evaluate == "nominal"


def test_every_form_of_model(whole: Project) -> None:
    forms = {name: type(block.model) for name, block in whole.subsystems.items()}
    assert forms == {
        "controller": types.PidModel,
        "filter": types.PolynomialModel,
        "valve": types.PoleZeroModel,
        "damper": types.FactoredModel,
        "flue": types.PolynomialModel,
        "display": types.FactoredModel,
        "flow_controller": types.PidModel,
        "plant": types.MatrixModel,
        "thermal": types.StateSpaceModel,
        "sampler": types.SampledModel,
        "sampled_controller": types.SampledModel,
    }


def test_equations_put_the_output_below(whole: Project) -> None:
    model = whole.subsystems["filter"].model
    assert isinstance(model, types.PolynomialModel)
    assert model.written_as == "equation"
    assert [value.as_written for value in model.denominator] == ["0.1 s", "1"]
    assert [value.as_written for value in model.numerator] == ["1"]


def test_dead_time_alone_is_beside_a_gain_of_one(whole: Project) -> None:
    display = whole.subsystems["display"]
    assert isinstance(display.model, types.FactoredModel)
    assert display.model.gain.as_written == "1"
    assert display.dead_time is not None
    assert display.dead_time.as_written == "1 s"
    damper = whole.subsystems["damper"]
    assert damper.dead_time is not None
    assert damper.dead_time.as_written == "20 ms"


def test_matrices_by_rows_by_name_and_flat(whole: Project) -> None:
    model = whole.subsystems["thermal"].model
    assert isinstance(model, types.StateSpaceModel)
    written = [[[cell.as_written for cell in row] for row in matrix] for matrix in (model.a, model.b, model.c, model.d)]
    assert written == [
        [["-0.2 1/s", "0.1 1/s"], ["0.3 1/s", "-0.4 1/s"]],
        [["0.1 K/(W*s)"], ["0 K/(W*s)"]],
        [["1", "0"], ["0", "1"]],
        [["0 K/W"], ["0 K/W"]],
    ]


def test_numerators_by_output_and_input(whole: Project) -> None:
    model = whole.subsystems["plant"].model
    assert isinstance(model, types.MatrixModel)
    assert list(model.numerators) == [("flow", "duty"), ("flow", "load"), ("current", "duty"), ("current", "load")]


def test_ports(whole: Project) -> None:
    valve = whole.subsystems["valve"]
    port = valve.inputs["input"]
    assert port.unit.symbol == "V"
    assert port.linear_range is not None
    assert [value.as_written for value in port.linear_range] == ["0 V", "10 V"]
    assert port.rate_range is not None
    assert port.span is not None
    assert list(whole.subsystems["plant"].outputs) == ["flow", "current"]


def test_what_a_subsystem_says_of_its_model(whole: Project) -> None:
    valve, controller = whole.subsystems["valve"], whole.subsystems["controller"]
    assert valve.pedigree is not None
    assert (valve.pedigree.kind, valve.pedigree.source) == ("identified", "KD-DAT-2, figure 3")
    assert valve.valid_to is not None
    assert valve.valid_to.as_written == "30 rad/s"
    stands_for = controller.stands_for
    assert stands_for is not None
    assert stands_for.by == "hold_as_delay"
    assert [value and value.as_written for value in (stands_for.sampled, stands_for.delay)] == ["1 ms", "0.5 ms"]


def test_what_a_later_version_answers_is_kept(whole: Project) -> None:
    assert {name: [kept.id for kept in entries] for name, entries in whole.kept.items()} == {
        "cases": ["hot"],
    }
    assert whole.documents["KD-DAT-2"].content["issue"] == 3


def test_records(whole: Project) -> None:
    record = whole.evidence["KD-TR-9"]
    assert [one.as_written for one in record.results] == ["3.3 s", "3.1 s"]
    assert (record.design_revision, record.requirements, record.outcome) == ("2", ("KD-3",), None)
    assert record.file is not None
    assert (record.file.path, record.file.found) == ("leak_test.csv", None)
    assert whole.evidence["KD-TR-10"].outcome == "meets"
    assert whole.decision_rule == DecisionRule("guarded_acceptance", fmpq(1))
    assert whole.model_agreement is not None
    assert whole.model_agreement.at_most.as_written == "10 %"


def test_budgets(whole: Project) -> None:
    phases, shared = whole.requirements["KD-8"].budget, whole.requirements["KD-9"].budget
    assert phases is not None
    assert [(one.subsystem, one.share and one.share.as_written) for one in phases.blocks] == [("damper", "-40 deg")]
    assert phases.limit is not None
    assert (phases.limit.kind, phases.combine) == ("at_least", "sum")
    assert shared is not None
    first, second = shared.shares
    assert (first.factor, first.level, first.group, first.mean) == (fmpq(-2), fmpq(1), "heat", False)
    assert (second.mean, second.aim) == (True, Aim("settling_time", "draught_loop.follow"))


def test_waivers(whole: Project) -> None:
    first, second, third = whole.waivers.values()
    criteria = whole.requirements["KD-2"].criteria
    assert first.chosen == {"KD-2": criteria[0]}
    assert (first.scope, first.expires) == ("kiln 2", Expiry("2027-03-01", None))
    assert (second.standing, second.expires) == ("out_of_range", Expiry(None, "C"))
    assert [one for one in criteria if second.about("KD-2", one)] == [criteria[0]]
    assert (third.outcome, third.limits) == (True, ())


def test_what_a_criterion_keeps(whole: Project) -> None:
    criteria = whole.requirements["KD-2"].criteria
    assert [criterion.evaluate for criterion in criteria][:4] == [None, "worst_case", None, "probability"]
    assert [dict(criterion.kept) for criterion in criteria if criterion.kept] == [
        {"cases": ["hot"]},
        {"evaluate": {"probability": "99 %", "confidence": "95 %", "seed": 7}},
    ]
    assert [criterion.mask.name for criterion in criteria if criterion.mask is not None] == ["gust_mask"]
    assert list(whole.masks) == ["gust_mask"]
    ranges = [[end.as_written for end in criterion.over] for criterion in criteria if criterion.over is not None]
    assert ranges == [["0.1 rad/s", "10 rad/s"]]
    assert list(criteria[2].arguments) == ["from", "to"]


def test_responses_of_all_kinds(whole: Project) -> None:
    responses = whole.loops["draught_loop"].responses
    kinds = {name: [excitation.kind for excitation in found.excitations] for name, found in responses.items()}
    assert kinds == {
        "follow": ["step"],
        "reject": ["step"],
        "climb": ["ramp"],
        "bend": ["parabola"],
        "knock": ["impulse"],
        "set": ["ramp_and_hold"],
        "puff": ["pulse"],
        "swell": ["one_minus_cosine"],
        "hum": ["sine"],
        "hiss": ["white_noise"],
        "both": ["step", "step"],
    }
    assert responses["set"].excitations[0].options == {"count_from": "end_of_ramp"}
    assert (responses["follow"].reference, responses["reject"].reference, responses["climb"].reference) == (
        "demand",
        "0",
        None,
    )
    assert list(responses["both"].excitations[1].quantities) == ["size", "at"]


def test_the_rest_of_a_requirement(whole: Project) -> None:
    first, second, third, fourth = (whole.requirements[f"KD-{n}"] for n in (1, 2, 3, 4))
    assert first.external == {"document": "KD-CON-1", "issue": 2, "place": "4.1.2"}
    assert first.coverage == {"complete": True, "by": "Process", "on": "2026-02-01"}
    assert [(link.id, link.kept) for link in second.derived_from] == [
        ("KD-1", {"reaffirmed": {"by": "Process", "on": "2026-02-02"}})
    ]
    assert [link.id for link in second.allocated_to] == ["draught_loop", "damper"]
    assert third.basis is not None
    assert (third.basis.kind, third.basis.evidence) == ("evidence", "KD-TR-9")
    assert third.budget is not None
    assert (third.budget.combine, third.budget.level, [one.id for one in third.budget.shares]) == (
        "root_sum_square",
        fmpq(2),
        ["KD-4"],
    )
    assert third.budget.reserve is not None
    assert third.budget.reserve.as_written == "10 %"
    assert fourth.not_applicable == types.NotApplicable("No people near.", "Lead", "2026-01-01")


def test_breaks(whole: Project) -> None:
    main, inner = whole.loops["draught_loop"].breaks.values()
    assert (main.at, main.into, main.with_open) == ("draught", None, ())
    assert (inner.at, inner.into, inner.with_open) == ("draught", "display", ("angle",))
