"""A project to its baseline."""

from __future__ import annotations

from specgate.project.parameters import values
from specgate.project.types import Project
from specgate.review.build import review
from specgate.review.types.baseline import Frozen
from specgate.traceability.baseline import frozen

FORMAT = 1
"""Version of the format of baselines."""


def freeze(project: Project, before: Frozen | None = None) -> Frozen:
    """Freeze a project; links that are stale since an earlier baseline stay stale. Raises Fault as `review` does."""
    links = None if before is None else before.links
    return Frozen(FORMAT, frozen(project, values(project), links), review(project, baseline=links))
