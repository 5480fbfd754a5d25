"""Parameters, subsystems and documents as they stand in a Review."""

from __future__ import annotations

from collections.abc import Mapping

from flint import fmpq

from specgate.analysis.analyses import Analyses
from specgate.analysis.reads import parameters_read
from specgate.compliance.readings import Reading
from specgate.project.blocks import build
from specgate.project.parameters import Values, evaluate, infer, parameters
from specgate.project.types import (
    FactoredModel,
    MatrixModel,
    Parameter,
    PidModel,
    PoleZeroModel,
    PolynomialModel,
    Port,
    Project,
    SampledModel,
    StateSpaceModel,
    Subsystem,
    Value,
)
from specgate.response.answers import Answer
from specgate.review.printing import as_plain, coefficients, location, short
from specgate.review.types import ParameterReview, SpecificationReview, SubsystemReview
from specgate.terms.dimensions import DIMENSIONLESS, Dimension
from specgate.terms.enclosed import printed, printed_exact
from specgate.terms.expressions import Expression, Number, as_dimension, literal_unit
from specgate.terms.unit import ONE, Unit
from specgate.terms.units import UnitTable

_FORMS: Mapping[type, str] = {
    PolynomialModel: "polynomials in s",
    FactoredModel: "factors",
    PoleZeroModel: "poles and zeros",
    StateSpaceModel: "state space",
    PidModel: "controller",
    MatrixModel: "polynomials in s, several inputs or outputs",
    SampledModel: "sampled controller",
}


def specification(project: Project, analyses: Analyses) -> SpecificationReview:
    """Print what the files say, evaluated."""
    values = analyses.nominal.values
    used = {name for loop in analyses.loops.values() for name in loop.subsystems}
    return SpecificationReview(
        parameters={name: _parameter(one, scope, name, analyses) for name, (one, scope) in parameters(project).items()},
        subsystems={
            name: _subsystem(one, values, name in used, name in project.units_by_fit)
            for name, one in project.subsystems.items()
        },
        documents={name: as_plain(kept.content) for name, kept in project.documents.items()},
    )


def _parameter(parameter: Parameter, scope: str | None, name: str, analyses: Analyses) -> ParameterReview:
    values, again = analyses.nominal.values, analyses.again.values
    expression = parameter.value.expression
    unit = _shown_unit(expression, as_dimension(values.inferred[name]))
    if isinstance(expression, Number) and unit.kind == "decibel":
        form = printed_exact(expression.value)
    else:
        number = Reading(Answer.of_exact(values.numbers[name]), Answer.of_exact(again.numbers[name])).in_unit(unit)
        form = printed_exact(number.exact) if number.exact is not None else printed(number.enclose)
    return ParameterReview(
        value=form.value,
        exact=form.exact,
        unit=unit.symbol,
        as_written=parameter.value.as_written,
        location=location(parameter.place),
        tolerance=_tolerance(parameter, scope, values),
        source=parameter.value.source,
    )


def _shown_unit(expression: Expression, dimension: Dimension) -> Unit:
    """Return the coherent unit of a value, by the name it was written with or has in the table; dB and pi stay."""
    written = literal_unit(expression)
    if written is not None:
        stays = written.kind == "decibel" or written.pi_power != 0 or written.factor == 1
        return written if stays else UnitTable.standard().coherent(written)
    return ONE if dimension == DIMENSIONLESS else UnitTable.standard().coherent(Unit("", fmpq(1), 0, dimension))


def _tolerance(parameter: Parameter, scope: str | None, values: Values) -> Mapping[str, str] | None:
    tolerance = parameter.value.tolerance
    if tolerance is None:
        return None
    sides = {"lower": tolerance.lower, "upper": tolerance.upper}
    shown = {
        key: _deviation(Value(side, tolerance.as_written, parameter.place), scope, values)
        for key, side in sides.items()
    }
    distribution = {} if tolerance.distribution is None else {"distribution": tolerance.distribution}
    return {**shown, "as_written": tolerance.as_written, **distribution}


def _deviation(side: Value, scope: str | None, values: Values) -> str:
    """Write a deviation with its sign, in the unit in which it is written, else in coherent SI."""
    expression = side.expression
    unit = literal_unit(expression) or _shown_unit(expression, as_dimension(infer(side, values, scope)))
    if isinstance(expression, Number) and unit.kind == "decibel":
        text = short(expression.value)
    else:
        text = short(evaluate(side, values, scope) / unit.si_factor)
    signed = text if text.startswith("-") else f"+{text}"
    return signed if unit.symbol == "1" else f"{signed} {unit.symbol}"


def _subsystem(subsystem: Subsystem, values: Values, used: bool, by_fit: bool) -> SubsystemReview:
    block = build(subsystem, values).block
    numerators = {} if block is None else {key: coefficients(one) for key, one in block.numerators.items()}
    single = len(subsystem.inputs) == 1 and len(subsystem.outputs) == 1
    return SubsystemReview(
        title=subsystem.title,
        owner=subsystem.owner,
        inputs=_units(subsystem.inputs),
        outputs=_units(subsystem.outputs),
        model=_form(subsystem),
        numerators={_channel(output, source, subsystem): one for (output, source), one in numerators.items()},
        numerator=next(iter(numerators.values()), ()) if single else (),
        denominator=() if block is None else coefficients(block.denominator),
        reads=parameters_read(subsystem, values),
        used=used,
        location=location(subsystem.place),
        realised=subsystem.realised,
        by_fit=by_fit,
        ranges=_ranges({**subsystem.inputs, **subsystem.outputs}) or None,
        dead_time=None if block is None or block.dead_time == 0 else str(block.dead_time),
        model_claims=_claims(subsystem) or None,
    )


def _claims(subsystem: Subsystem) -> dict[str, str]:
    """Return what the project says of a model."""
    found: dict[str, str] = {}
    pedigree, stands_for = subsystem.pedigree, subsystem.stands_for
    if pedigree is not None:
        found["pedigree"] = pedigree.kind + (f", {pedigree.source}" if pedigree.source else "")
    if subsystem.valid_to is not None:
        found["valid_to"] = subsystem.valid_to.as_written
    if stands_for is not None:
        values = (("sampled", stands_for.sampled), ("delay", stands_for.delay))
        parts = [f"{key} {value.as_written}" for key, value in values if value is not None]
        found["stands_for"] = ", ".join([*parts, *([f"by {stands_for.by}"] if stands_for.by else [])])
    return found


def _ranges(ports: Mapping[str, Port]) -> dict[str, str]:
    kinds = ("linear_range", "rate_range", "span")
    given = ((f"{name} {kind}", getattr(port, kind)) for name, port in ports.items() for kind in kinds)
    return {key: f"{ends[0].as_written} to {ends[1].as_written}" for key, ends in given if ends is not None}


def _form(subsystem: Subsystem) -> str:
    model = subsystem.model
    form = _FORMS[type(model)]
    if isinstance(model, PidModel):
        form = f"controller, {model.form} form"
    elif isinstance(model, PolynomialModel) and model.written_as == "equation":
        form = "differential equation"
    return form if subsystem.dead_time is None else f"{form}, dead time {subsystem.dead_time.as_written}"


def _channel(output: str, source: str, subsystem: Subsystem) -> str:
    return output if len(subsystem.inputs) == 1 else f"{output}/{source}"


def _units(ports: Mapping[str, Port]) -> dict[str, str]:
    return {name: port.unit.symbol for name, port in ports.items()}
