"""A baseline as it is kept in a file: what the links stood on, and the result that later runs are compared with."""

from __future__ import annotations

from collections.abc import Mapping

from specgate.review.types.run import Review
from specgate.terms.records import record
from specgate.traceability.baseline import Affirmed


@record
class Frozen:
    """A baseline. baseline: version of its format; links: by child and parent."""

    baseline: int
    links: Mapping[str, Mapping[str, Affirmed]]
    result: Review
