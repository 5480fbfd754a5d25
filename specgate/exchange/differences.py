"""The differences of two revisions written as JSON and read back, nothing added, nothing lost."""

from __future__ import annotations

import json
from typing import cast

from specgate.exchange.json import built, written
from specgate.revisions.types import Differences


def write(differences: Differences) -> str:
    """Write differences as JSON text that ends with a line break."""
    return written(differences)


def read(text: str) -> Differences:
    """Read differences back. Raises ValueError where the text holds none."""
    return cast(Differences, built(Differences, json.loads(text), "differences"))
