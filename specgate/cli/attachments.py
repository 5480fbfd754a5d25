"""The files that a report carries."""

from __future__ import annotations

import io
from collections.abc import Mapping
from typing import Any

from specgate.terms.errors import EnvironmentProblem, UnusableProblem

RESULT = "results.json"
"""Name of the attachment that holds the result."""
LARGEST = 256 * 1024 * 1024
"""Bytes of all attachments together."""


def attachments(name: str, content: bytes) -> Mapping[str, bytes]:
    """Return the attachments of the PDF `name` by their names. Raises UnusableProblem where it cannot be read."""
    try:
        import pikepdf
    except ImportError as error:
        raise EnvironmentProblem(f"reading a PDF needs the library pikepdf ({error}): pip install pikepdf") from error
    try:
        with pikepdf.open(io.BytesIO(content)) as pdf:
            return _files(name, pdf)
    except pikepdf.PdfError as problem:
        raise UnusableProblem(f"{name} cannot be read as a PDF: {problem}") from None


def _files(name: str, pdf: Any) -> dict[str, bytes]:
    found: dict[str, bytes] = {}
    size = 0
    for each, attached in pdf.attachments.items():
        found[each] = attached.get_file().read_bytes()
        size += len(found[each])
        if size > LARGEST:
            raise UnusableProblem(f"{name} carries more than {LARGEST // 1024**2} MB of attachments")
    return found
