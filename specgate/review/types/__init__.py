"""The Review: what a run found, in plain values; a mirror of the results format, key for key.

Every field is named as in `schemas/results.schema.json`, so that the machine-readable result is this tree written
out and read back (`exchange.json`). Reports and differences need nothing beside it. Field metadata: `json` where
the key is a Python keyword or otherwise differs (`from_` is written `from`); fields that are None and whose
metadata says `omit` are left out, except in the record of the measure named by `said_for`.
"""

from __future__ import annotations

from specgate.review.types.bases import (
    BasisReview,
    ConditionReview,
    ErrorCurveReview,
    ErrorReview,
    InsteadReview,
    PointReview,
    SeparationReview,
)
from specgate.review.types.budgets import BudgetReview, ShareReview, Span
from specgate.review.types.formulas import FormulaReview, FormulasReview
from specgate.review.types.loops import (
    BreakReview,
    CrossingReview,
    Curve,
    FrequencyCurve,
    HiddenMode,
    InZ,
    LoopReview,
    ResponseReview,
)
from specgate.review.types.records import DisagreementReview, EvidenceReview, RecordFileReview, WaiverReview
from specgate.review.types.requirements import (
    AssumptionReview,
    CriterionReview,
    FigureReview,
    LimitReview,
    MaskReview,
    MethodReview,
    ModelAssumptionReview,
    RequirementReview,
    ReserveReview,
)
from specgate.review.types.run import (
    DefinitionReview,
    FindingReview,
    GateReview,
    InputReview,
    PolicyReview,
    ProjectReview,
    Review,
    ToolReview,
    Unusable,
)
from specgate.review.types.specification import ParameterReview, SpecificationReview, SubsystemReview
from specgate.review.types.values import (
    Amount,
    Beside,
    DelayedTerm,
    Enclosure,
    Location,
    MeasureResult,
    Pole,
    ProofPart,
    ProofRecord,
    Result,
)

__all__ = [
    "Amount",
    "AssumptionReview",
    "BasisReview",
    "Beside",
    "BreakReview",
    "BudgetReview",
    "ConditionReview",
    "CriterionReview",
    "CrossingReview",
    "Curve",
    "DefinitionReview",
    "DelayedTerm",
    "DisagreementReview",
    "Enclosure",
    "ErrorCurveReview",
    "ErrorReview",
    "EvidenceReview",
    "FigureReview",
    "FindingReview",
    "FormulaReview",
    "FormulasReview",
    "FrequencyCurve",
    "GateReview",
    "HiddenMode",
    "InZ",
    "InputReview",
    "InsteadReview",
    "LimitReview",
    "Location",
    "LoopReview",
    "MaskReview",
    "MeasureResult",
    "MethodReview",
    "ModelAssumptionReview",
    "ParameterReview",
    "PointReview",
    "Pole",
    "PolicyReview",
    "ProjectReview",
    "ProofPart",
    "ProofRecord",
    "RecordFileReview",
    "RequirementReview",
    "ReserveReview",
    "ResponseReview",
    "Result",
    "Review",
    "SeparationReview",
    "ShareReview",
    "Span",
    "SpecificationReview",
    "SubsystemReview",
    "ToolReview",
    "Unusable",
    "WaiverReview",
]
