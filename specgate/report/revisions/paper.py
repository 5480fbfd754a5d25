"""Differences as PDF/A-3a and PDF/UA-1, with themselves attached for machines to read."""

from __future__ import annotations

from specgate.report import pdf, typeface
from specgate.report.revisions.page import SECTIONS, on_paper
from specgate.report.revisions.view import view
from specgate.revisions.types import Differences

ATTACHED = "differences.json"


def render(found: Differences, attached: bytes, *, paper: str = "A4") -> bytes:
    """Return the differences as a PDF on `paper`; attached: the same as JSON. Raises what `pdf.render` raises."""
    pdf.require()
    seen = view(found, typeface.characters().__contains__)
    held = pdf.Attachments({ATTACHED: attached}, frozenset(), found.new.project.date)
    return pdf.laid_out(on_paper(seen, paper), held, dict(SECTIONS))
