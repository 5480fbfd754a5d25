"""The specification as it stands in the files: typed, frozen, every number still an expression.

Nothing here is evaluated: `specgate.project.instantiate` gives the loops for given values.
Mappings keep the order of the files. Absent optional parts are None or empty.
"""

from __future__ import annotations

from specgate.project.types.budgets import BlockShare, Budget, Share
from specgate.project.types.criteria import Band, Basis, Claim, Corner, Criterion, Limit, MaskDefinition, Subject
from specgate.project.types.loops import (
    Break,
    Call,
    Excitation,
    Loop,
    LoopInput,
    Response,
    Scaled,
    Signal,
    SignalExpression,
    SignalName,
    Sum,
)
from specgate.project.types.models import (
    FactoredModel,
    Matrix,
    MatrixModel,
    Model,
    Pair,
    PidModel,
    PoleZeroModel,
    Polynomial,
    PolynomialModel,
    Root,
    SampledModel,
    StateSpaceModel,
    UnreadModel,
)
from specgate.project.types.records import Aim, DecisionRule, Evidence, Expiry, ModelAgreement, RecordFile, Waiver
from specgate.project.types.requirements import Link, Method, NotApplicable, Requirement
from specgate.project.types.subsystems import Pedigree, Port, StandIn, Subsystem
from specgate.project.types.values import Parameter, Tolerance, Value
from specgate.project.types.whole import GatePolicy, InputFile, Kept, Project, ProjectInfo, Wording

__all__ = [
    "Aim",
    "Band",
    "Basis",
    "BlockShare",
    "Break",
    "Budget",
    "Call",
    "Claim",
    "Corner",
    "Criterion",
    "DecisionRule",
    "Evidence",
    "Excitation",
    "Expiry",
    "FactoredModel",
    "GatePolicy",
    "InputFile",
    "Kept",
    "Limit",
    "Link",
    "Loop",
    "LoopInput",
    "MaskDefinition",
    "Matrix",
    "MatrixModel",
    "Method",
    "Model",
    "ModelAgreement",
    "NotApplicable",
    "Pair",
    "Parameter",
    "Pedigree",
    "PidModel",
    "PoleZeroModel",
    "Polynomial",
    "PolynomialModel",
    "Port",
    "Project",
    "ProjectInfo",
    "RecordFile",
    "Requirement",
    "Response",
    "Root",
    "SampledModel",
    "Scaled",
    "Share",
    "Signal",
    "SignalExpression",
    "SignalName",
    "StandIn",
    "StateSpaceModel",
    "Subject",
    "Subsystem",
    "Sum",
    "Tolerance",
    "UnreadModel",
    "Value",
    "Waiver",
    "Wording",
]
