"""The PDF: archivable, accessible, sealed, the same every time.

veraPDF, which decides on PDF/A-3a and PDF/UA-1 as a whole, is asked in test_verapdf.py; what broke it while the
templates were made is checked here without it.
"""

from __future__ import annotations

import contextlib
import hashlib
import io
import itertools
import os
import re
import subprocess
import sys
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path
from types import ModuleType
from typing import Any

import pikepdf
import pytest

from specgate.report import page, pdf
from specgate.terms.errors import EnvironmentProblem

HOSTILE = (
    "</script><script>alert(1)</script><img src=file:///etc/hostname> url(file:///etc/hostname) 漢字 🎛 \u202e \x07"
)


def opened(data: bytes) -> pikepdf.Pdf:
    return pikepdf.open(io.BytesIO(data))


def text(data: bytes, tool: Callable[[str], str], *options: str) -> str:
    command = [tool("pdftotext"), *options, "-", "-"]
    return subprocess.run(command, input=data, capture_output=True, check=True).stdout.decode()


def structure(document: pikepdf.Pdf) -> Iterator[tuple[str, Any]]:
    """Yield every element of the tag tree with its type, in reading order."""
    waiting = [document.Root.StructTreeRoot.K]
    while waiting:
        node = waiting.pop()
        if isinstance(node, pikepdf.Array):
            waiting += reversed(list(node))
        elif isinstance(node, pikepdf.Dictionary) and "/S" in node:
            yield str(node.S), node
            if "/K" in node:
                waiting.append(node.K)


def test_it_says_that_it_is_archivable_and_accessible(sample_pdf: bytes) -> None:
    document = opened(sample_pdf)
    assert document.open_metadata().pdfa_status == "3A"
    assert b"<pdfuaid:part>1</pdfuaid:part>" in document.Root.Metadata.read_bytes()
    assert document.Root.MarkInfo.Marked
    assert str(document.Root.Lang) == "en"
    assert document.Root.ViewerPreferences.DisplayDocTitle
    assert str(document.docinfo["/Title"]) == "BD-ANA-021 revision B: Barley dryer, air and temperature control"


def test_its_syntax_is_clean(sample_pdf: bytes, tool: Callable[[str], str], tmp_path: Path) -> None:
    assert opened(sample_pdf).check_pdf_syntax() == []
    file = tmp_path / "report.pdf"
    file.write_bytes(sample_pdf)
    subprocess.run([tool("qpdf"), "--check", str(file)], check=True, capture_output=True)


def test_headings_skip_no_level_and_figures_are_described(sample_pdf: bytes) -> None:
    document = opened(sample_pdf)
    kinds = list(structure(document))
    levels = [int(kind[2]) for kind, _ in kinds if re.fullmatch(r"/H[1-6]", kind)]
    assert levels[0] == 1
    assert all(after <= before + 1 for before, after in itertools.pairwise(levels))
    figures = [node for kind, node in kinds if kind == "/Figure"]
    assert len(figures) > 10
    assert all(str(node.get("/Alt", "")) for node in figures)
    tables = [kind for kind, _ in kinds]
    assert tables.count("/TH") > 50


def widths(table: Any) -> list[int]:
    """How many columns each row of a tagged table has, cells that span rows and columns counted."""
    waiting, rows = list(table.K), []
    while waiting:
        node = waiting.pop(0)
        if str(node.S) == "/TR":
            rows.append(node)
        elif "/K" in node and isinstance(node.K, pikepdf.Array):
            waiting = [child for child in node.K if isinstance(child, pikepdf.Dictionary)] + waiting
    found: list[int] = []
    below: dict[int, int] = {}
    for number, row in enumerate(rows):
        width = below.pop(number, 0)
        cells = [row.K] if isinstance(row.K, pikepdf.Dictionary) else list(row.K)
        for cell in cells:
            across, down = _spans(cell)
            width += across
            for k in range(number + 1, number + down):
                below[k] = below.get(k, 0) + across
        found.append(width)
    return found


def _spans(cell: Any) -> tuple[int, int]:
    attributes = cell.get("/A", [])
    spans = {}
    for one in [attributes] if isinstance(attributes, pikepdf.Dictionary) else list(attributes):
        spans |= {key: int(one[key]) for key in ("/ColSpan", "/RowSpan") if key in one}
    return spans.get("/ColSpan", 1), spans.get("/RowSpan", 1)


def test_rows_of_a_table_have_one_width_wherever_the_page_ends(sample: ModuleType) -> None:
    """PDF/UA-1, 7.2: a cell that spans rows must not be torn from them by the end of a page."""
    review = sample.bare()
    several, standing = (sample.review().requirements[name] for name in ("BD-SYS-15", "BD-SUB-31"))
    most = replace(several, criteria=several.criteria * 12)
    long = {f"R{k}": replace(several, criteria=several.criteria[: 1 + k % 4], derived_from=()) for k in range(40)}
    long |= {f"S{k}": replace(standing, derived_from=()) for k in range(30)} | {"M": most}
    document = opened(pdf.render(replace(review, requirements=long, trace=dict.fromkeys(long, ())), {}))
    tables = [widths(node) for kind, node in structure(document) if kind == "/Table"]
    assert sum(len(rows) for rows in tables) > 250
    assert [rows for rows in tables if len(set(rows)) > 1] == []


def test_bookmarks_lead_to_the_sections(sample_pdf: bytes) -> None:
    with opened(sample_pdf).open_outline() as outline:
        top = [str(item.title) for item in outline.root]
        sheets = next(item for item in outline.root if item.title == "Loop sheets")
        names = [str(item.title) for item in sheets.children]
    assert [t for t in top if t in dict(page.SECTIONS).values()] == [
        "Compliance matrix",
        "Where the claims stand",
        "Loop sheets",
        "Trace",
        "Waivers, deviations, open points",
        "How to trust this report",
        "Cautions",
    ]
    assert names[0] == "Duct pressure loop duct_pressure · ●\u00a0stable"


def test_inputs_and_result_are_attached(sample_pdf: bytes, attached: dict[str, bytes]) -> None:
    document = opened(sample_pdf)
    assert {name: spec.get_file().read_bytes() for name, spec in document.attachments.items()} == attached
    relations = {name: str(spec.relationship) for name, spec in document.attachments.items()}
    assert relations == {"specgate.yaml": "/Source", "subsystems/air.yaml": "/Source", "results.json": "/Data"}
    kinds = {name: spec.get_file().mime_type for name, spec in document.attachments.items()}
    assert kinds == {
        "specgate.yaml": "application/yaml",
        "subsystems/air.yaml": "application/yaml",
        "results.json": "application/json",
    }
    assert len(document.Root.AF) == len(attached)


def test_links_say_where_they_lead(sample_pdf: bytes) -> None:
    said = [
        str(note.Contents)
        for leaf in opened(sample_pdf).pages
        for note in leaf.get("/Annots", [])
        if note.Subtype == "/Link"
    ]
    assert "BD-SYS-11 in the compliance matrix" in said
    assert not [words for words in said if words == "elsewhere in this report" or words.startswith("row-")]


def test_only_our_fonts_are_in_it(sample_pdf: bytes) -> None:
    names = {
        str(font.BaseFont).partition("+")[2]
        for leaf in opened(sample_pdf).pages
        for font in leaf.Resources.get("/Font", {}).values()
    }
    assert names
    assert all(name.replace("-", "").startswith("DejaVuSans") for name in names)


def test_it_reads_as_a_report(sample_pdf: bytes, tool: Callable[[str], str]) -> None:
    words = text(sample_pdf, tool, "-layout")
    pages = len(opened(sample_pdf).pages)
    assert f"page 1 of {pages}" in words
    assert f"page {pages} of {pages}" in words
    assert "The gate holds" in words
    assert re.search(r"BD-SYS-11 +◆ non-compliant ▲ out of range +Settling time 5\.037 s.*page \d+", words)
    assert re.search(r"BD-SYS-11 .*≤ ?1 ?s +5\.037 s +± 1×10⁻¹¹ +−4\.037 s .*non-compliant", words)
    for status in ("non-compliant", "open", "compliant", "not applicable", "out of range", "inconclusive", "sound"):
        assert status in words
    assert "They replace neither test nor hazard analysis." in words


def test_the_first_page_holds_what_a_signature_needs(sample_pdf: bytes, tool: Callable[[str], str]) -> None:
    first = text(sample_pdf, tool, "-f", "1", "-l", "1", "-layout")
    for wanted in (
        "Document",
        "Revision",
        "The gate holds",
        "What holds the gate",
        "Approved by",
        "Signature",
        "Digest of the inputs",
    ):
        assert wanted in first
    digests = re.findall(r"\b[0-9a-f]{64}\b", first)
    lines = f"{'5c' * 32}  specgate.yaml\n{'e0' * 32}  subsystems/air.yaml\n"
    assert digests == [hashlib.sha256(lines.encode()).hexdigest()]


def test_the_same_input_gives_the_same_bytes(tmp_path: Path) -> None:
    here = Path(__file__).parent
    program = (
        "import sys, hashlib, importlib.util as u\n"
        f"spec = u.spec_from_file_location('sample', {str(here / 'sample.py')!r})\n"
        "m = u.module_from_spec(spec); sys.modules['sample'] = m; spec.loader.exec_module(m)\n"
        "from specgate.report import pdf, html, terminal\n"
        "r = m.small()\n"
        "print(hashlib.sha256(pdf.render(r, {'specgate.yaml': b'1', 'results.json': b'2'})).hexdigest())\n"
        "print(hashlib.sha256(html.render(r).encode()).hexdigest())\n"
        "print(hashlib.sha256(terminal.render(r, width=100, colour=True).encode()).hexdigest())\n"
    )
    runs = [
        subprocess.run(
            [sys.executable, "-c", program],
            env={**os.environ, "PYTHONHASHSEED": seed, "TZ": zone},
            cwd=Path(pdf.__file__).parents[2],
            capture_output=True,
            check=True,
            text=True,
        ).stdout
        for seed, zone in (("0", "UTC"), ("4711", "Asia/Tokyo"))
    ]
    assert len(runs[0].split()) == 3
    assert runs[0] == runs[1]


def hostile(sample: ModuleType) -> Any:
    """The sample with texts that try to be more than text, and 300 requirements."""
    review = sample.small()
    first = review.requirements["BD-SYS-11"]
    many = {f"BD-X-{k:03}": replace(first, criteria=(), derived_from=()) for k in range(300)}
    evil = replace(first, text=f"{HOSTILE} {'long' * 300}", title=HOSTILE, owner=HOSTILE, reason=HOSTILE)
    return replace(
        review,
        project=replace(review.project, title=HOSTILE, sign_off=(HOSTILE,), stage=HOSTILE),
        requirements={**review.requirements, "BD-SYS-11": evil, **many},
        trace={**review.trace, **dict.fromkeys(many, ())},
        gate=replace(review.gate, reasons=(HOSTILE, *review.gate.reasons)),
    )


def test_texts_stay_texts(sample: ModuleType, tool: Callable[[str], str]) -> None:
    data = pdf.render(hostile(sample), {})
    words = text(data, tool, "-layout")
    assert "<script>alert(1)</script>" in words
    assert "[U+6F22][U+5B57] [U+1F39B] [U+202E] [U+0007]" in words.replace("\n", " ")
    assert Path("/etc/hostname").read_text().strip() not in words
    assert "BD-X-299" in words
    document = opened(data)
    assert not document.attachments
    assert not [n for leaf in document.pages for n in leaf.get("/Annots", []) if "/A" in n]
    boxes = text(data, tool, "-bbox")
    for width, body in re.findall(r'<page width="([\d.]+)"[^>]*>(.*?)</page>', boxes, re.DOTALL):
        assert all(float(edge) <= float(width) - 20 for edge in re.findall(r'xMax="([\d.]+)"', body))


def test_nothing_outside_the_document_is_drawn_in(
    sample: ModuleType, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    secret = tmp_path / "secret.svg"
    secret.write_text('<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9"><rect width="9" height="9"/></svg>')
    written = page.on_paper
    for attack in (
        f'<img src="{secret.as_uri()}" alt="x">',
        f'<a rel="attachment" href="{secret.as_uri()}">x</a>',
        f'<div style="background:url({secret.as_uri()})">x</div>',
        '<img src="http://127.0.0.1:9/x.png" alt="x">',
        '<svg width="9" height="9"><title>x</title><image href="http://127.0.0.1:9/x.png" width="9" height="9"/></svg>',
        "<style>@import url(http://127.0.0.1:9/x.css);</style>",
    ):
        monkeypatch.setattr(
            page, "on_paper", lambda *given, attack=attack: written(*given).replace("</main>", f"{attack}</main>")
        )
        small = sample.bare()
        with pytest.raises(pdf.Refused, match="refused to load"):
            pdf.render(small, {})


def test_a_document_that_the_engine_complains_about_is_refused(
    sample: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    written = page.on_paper
    monkeypatch.setattr(
        page, "on_paper", lambda *given: written(*given).replace("</main>", "<p style='colour: 1'>x</p></main>")
    )
    with pytest.raises(pdf.Refused, match="could not be laid out cleanly"):
        pdf.render(sample.bare(), {})


def test_a_missing_system_library_is_a_matter_of_the_environment(
    sample: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    class Broken:
        def find_spec(self, name: str, *_: object) -> None:
            if name == "weasyprint":
                raise OSError("cannot load library 'libpango-1.0-0'")

    for name in [name for name in sys.modules if name.partition(".")[0] == "weasyprint"]:
        monkeypatch.delitem(sys.modules, name)
    monkeypatch.setattr(sys, "meta_path", [Broken(), *sys.meta_path])
    with pytest.raises(
        EnvironmentProblem, match=r"apt-get install libpango-1\.0-0 libpangoft2-1\.0-0 libharfbuzz-subset0"
    ):
        pdf.render(sample.review(), {})


def test_keeping_the_list_of_pages_changes_no_byte(sample: ModuleType, monkeypatch: pytest.MonkeyPatch) -> None:
    kept = pdf.render(sample.small(), {})
    monkeypatch.setattr(pdf, "page_references_kept", contextlib.nullcontext)
    assert pdf.render(sample.small(), {}) == kept


def test_letter_paper(sample: ModuleType) -> None:
    small = sample.bare()
    document = opened(pdf.render(small, {}, paper="Letter"))
    box = document.pages[0].MediaBox
    assert [round(float(edge)) for edge in box] == [0, 0, 612, 792]


def test_an_undated_project_has_no_date_of_its_own(sample: ModuleType) -> None:
    review = sample.bare()
    undated = replace(review, project=replace(review.project, date=None))
    first, second = (pdf.render(undated, {"specgate.yaml": b"x"}) for _ in range(2))
    assert first == second
    assert "/CreationDate" not in opened(first).docinfo
