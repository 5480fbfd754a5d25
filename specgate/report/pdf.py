"""The compliance report as PDF/A-3a and PDF/UA-1: tagged, bookmarked, with its inputs and its result attached.

The same review and the same attachments give the same bytes on the same versions of the libraries. Nothing outside
the document can be drawn in: every address is refused, and so is any document that the layout engine complains about.
"""

from __future__ import annotations

import gc
import hashlib
import logging
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from datetime import UTC, datetime
from functools import partial
from typing import Any

from specgate.report import anchors, finish, typeface
from specgate.report.view import View, view
from specgate.review.types import Review
from specgate.terms.errors import EnvironmentProblem
from specgate.terms.records import record

LIBRARIES = "libpango-1.0-0 libpangoft2-1.0-0 libharfbuzz-subset0"
"""Debian packages of the system libraries that lay out text."""
UNDATED = datetime(2000, 1, 1, tzinfo=UTC)
"""Date of the attachments of a project that states none: the clock would make every run differ."""


class Refused(Exception):
    """The layout engine complained or asked for something outside the document; nothing is written."""


def render(review: Review, attachments: Mapping[str, bytes], *, paper: str = "A4") -> bytes:
    """Return the report of a review as a PDF on `paper` (A4 or Letter), with files attached by name.

    Attachments that are inputs of the review are its source, all others are data. Raises EnvironmentProblem where
    a system library is missing, Refused where the document cannot be laid out cleanly.
    """
    require()
    from specgate.report.page import on_paper

    seen = view(review, typeface.characters().__contains__)
    held = Attachments(attachments, frozenset(item.path for item in review.inputs), review.project.date)
    return laid_out(on_paper(seen, paper), held, destinations(seen))


@record
class Attachments:
    """Files that a PDF carries, by name. sources: those that are inputs; date: of the project."""

    files: Mapping[str, bytes]
    sources: frozenset[str]
    date: str | None


def require() -> None:
    """Raise EnvironmentProblem where a system library is missing."""
    _engine()


def laid_out(html: str, held: Attachments, places: Mapping[str, str]) -> bytes:
    """Lay out a document as a PDF that carries files; `places` says in words where its links lead.

    Raises what `render` raises.
    """
    engine = _engine()
    names = sorted(held.files, key=_name_in_pdf)
    identity = hashlib.sha256(html.encode() + b"".join(held.files[name] for name in names)).hexdigest()[:32]
    with typeface.only_ours(), _no_garbage_collection(), page_references_kept(), _complaints() as said:
        fetcher = _closed(engine)
        document = engine.HTML(string=html, url_fetcher=fetcher)
        files = [_attachment(engine, name, held.files[name], name in held.sources, held.date) for name in names]
        try:
            data = document.write_pdf(
                pdf_variant="pdf/a-3a",
                attachments=files,
                pdf_identifier=identity.encode(),
                finisher=partial(_finish, places),
            )
        except BaseException as error:
            # The engine's own error about a refused address does not derive from Exception.
            if fetcher.blocked:
                raise Refused(f"refused to load {fetcher.blocked[0]}") from error
            raise
    if fetcher.blocked:
        raise Refused(f"refused to load {fetcher.blocked[0]}")
    _judge(said)
    return bytes(data)


def _finish(places: Mapping[str, str], _document: Any, pdf: Any) -> None:
    finish.finish(pdf, places)


def _engine() -> Any:
    try:
        import weasyprint  # type: ignore[import-untyped]
    except OSError as error:
        raise EnvironmentProblem(
            f"a PDF needs system libraries that this machine lacks ({error}). "
            f"On Debian: apt-get install {LIBRARIES}. The HTML report needs none of them: -o FILE.html"
        ) from error
    return weasyprint


def _judge(said: list[str]) -> None:
    if any("harfbuzz" in line.lower() for line in said):
        raise EnvironmentProblem(f"a PDF needs the system library that reduces fonts: apt-get install {LIBRARIES}")
    if said:
        raise Refused(f"the PDF could not be laid out cleanly: {said[0]}")


def _closed(engine: Any) -> Any:
    """Return a fetcher that fetches nothing and remembers what it was asked for."""
    from weasyprint import urls

    class Closed(urls.URLFetcher):  # type: ignore[misc, unused-ignore]
        """Refuses every address."""

        def __init__(self) -> None:
            super().__init__(allowed_protocols=(), allow_redirects=False, fail_on_errors=True)
            self.blocked: list[str] = []

        def fetch(self, url: str, headers: Any = None) -> Any:
            self.blocked.append(url)
            raise urls.FatalURLFetchingError(f"refused: {url}")

    return Closed()


def _name_in_pdf(name: str) -> bytes:
    """Return a name as the file spells it: a name tree is sorted by these bytes (ISO 32000-1, 7.9.6)."""
    return name.encode() if name.isascii() else b"\xfe\xff" + name.encode("utf-16-be")


def _attachment(engine: Any, name: str, data: bytes, source: bool, date: str | None) -> Any:
    when = datetime.fromisoformat(date).replace(tzinfo=UTC) if date else UNDATED
    return engine.Attachment(
        string=data,
        name=name,
        description="Input that the verdicts rest on" if source else "Result, machine-readable",
        relationship="Source" if source else "Data",
        created=when,
        modified=when,
    )


def destinations(seen: View) -> dict[str, str]:
    """Return every place of a report that links lead to, in words."""
    from specgate.report.page import SECTIONS

    places = dict(SECTIONS)
    for group in seen.groups:
        places |= {row.anchor: f"{row.id} in the compliance matrix" for row in group.rows}
    places |= {audit.anchor: f"the basis of {audit.requirement}" for audit in seen.audits}
    for sheet in seen.loops:
        places[sheet.anchor] = f"the sheet of {sheet.name}"
        places |= {anchors.plot(sheet.name, r.name): f"the response {sheet.name}.{r.name}" for r in sheet.responses}
    return places


@contextmanager
def _no_garbage_collection() -> Iterator[None]:
    """Hold collection off: a layout is one growing tree, and searching it for garbage costs a quarter of the time."""
    before = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if before:
            gc.enable()


@contextmanager
def page_references_kept() -> Iterator[None]:
    """Let the writer keep the list of its pages: it makes it anew for every box, which grows with their square."""
    import pydyf  # type: ignore[import-untyped]

    made = pydyf.PDF.page_references

    def kept(pdf: Any) -> Any:
        count = len(pdf.pages["Kids"])
        known = getattr(pdf, "_kept_references", None)
        if known is None or known[0] != count:
            known = pdf._kept_references = (count, made.fget(pdf))
        return known[1]

    pydyf.PDF.page_references = property(kept)
    try:
        yield
    finally:
        pydyf.PDF.page_references = made


@contextmanager
def _complaints() -> Iterator[list[str]]:
    """Collect what the engine logs from warnings up: it writes the file all the same."""
    said: list[str] = []

    class Collector(logging.Handler):
        def emit(self, record: logging.LogRecord) -> None:
            said.append(record.getMessage())

    handler = Collector(logging.WARNING)
    loggers = [logging.getLogger(name) for name in ("weasyprint", "fontTools")]
    levels = [(logger, logger.propagate) for logger in loggers]
    for logger in loggers:
        logger.addHandler(handler)
        logger.propagate = False
    try:
        yield said
    finally:
        for logger, propagate in levels:
            logger.removeHandler(handler)
            logger.propagate = propagate
