"""What `check` prints: the gate first, then a line for each limit, then every finding with its place."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from specgate.report.clean import cleaned
from specgate.report.columns import GAP, Cell, Column, cells, filled, fitted, folded, wrapped
from specgate.report.digits import FIGURE_SPACE, POINT_SPACE, aligned
from specgate.report.parts import formulas, front, matrix
from specgate.report.words import LEVELS, OUTCOMES, Status, counted
from specgate.review.types import FindingReview, Review, Unusable

_Paint = Callable[[str, str], str]
"""Puts the colour of a key on a text, or not."""
RED, YELLOW, GREEN, DIM, BOLD = "31", "33", "32", "2", "1"
_COLOURS = {
    **dict.fromkeys(("hold", "unusable", "non_compliant", "out_of_range", "error"), RED),
    **dict.fromkeys(("open", "inconclusive", "warning"), YELLOW),
    **dict.fromkeys(("pass", "compliant", "sound"), GREEN),
    **dict.fromkeys(("not_applicable", "note", "quiet"), DIM),
    "bold": BOLD,
}
COLUMNS = (
    Column("verdict"),
    Column("requirement", least=12),
    Column("measure", least=14),
    Column("of", least=12, expendable=2),
    Column("result", number=True),
    Column("limit", right=True),
    Column("reserve", number=True, expendable=3),
    Column("standing", expendable=4),
    Column("basis", least=12, expendable=1),
)
FORMULA_COLUMNS = (
    Column("formula", least=24),
    Column("estimates", least=14),
    Column("gives", number=True),
    Column("proved", number=True, expendable=2),
    Column("error", right=True),
    Column("side", expendable=1),
    Column("state"),
    Column("fails"),
)
STANDING = next(k for k, column in enumerate(COLUMNS) if column.heading == "standing")
"""Number of the column of the standing; where it is left out, a standing that is not sound is said below the line."""


def render(review: Review | Unusable, *, width: int, colour: bool) -> str:
    """Return the result of a run as text of at most `width` columns where words allow it, ending in a line feed."""
    paint = _painted if colour else _plain
    shown = cleaned(review)
    lines = _unusable(shown, width, paint) if isinstance(shown, Unusable) else _review(shown, width, paint)
    return "\n".join(line.rstrip() for line in lines) + "\n"


def _plain(text: str, key: str) -> str:
    return text


def _painted(text: str, key: str) -> str:
    code, words = _COLOURS.get(key), text.rstrip()
    return f"\x1b[{code}m{words}\x1b[0m{text[len(words) :]}" if code and words else text


def _state(status: Status) -> Cell:
    return Cell(f"{status.shape} {status.word}", status.key)


def _standing(status: Status | None) -> Cell:
    """Return a standing, coloured where it is not sound."""
    return (
        Cell("") if status is None else Cell(f"{status.shape} {status.word}", status.key if status.weight < 2 else "")
    )


def _review(review: Review, width: int, paint: _Paint) -> Iterator[str]:
    page = front.front(review)
    outcome = page.outcome
    yield (
        paint(f"{outcome.shape} The gate {outcome.word}", outcome.key)
        + f"  {page.title.document} revision {page.title.revision}"
    )
    yield from wrapped(page.title.title, width)
    yield from wrapped(page.sentence, width)
    for counts in (page.verdicts, page.standings):
        yield GAP + GAP.join(
            paint(f"{c.status.shape} {c.number} {c.status.word}", c.status.key) for c in counts if c.number
        )
    yield ""
    yield from _table(review, width, paint)
    if review.findings:
        yield ""
        yield paint(f"Findings ({_levels(review.findings)})", "bold")
        yield from _findings(review.findings, width, paint)
    for table in formulas.tables(review):
        yield ""
        yield from _formulas(table, width, paint)


def _formulas(table: formulas.FormulaTable, width: int, paint: _Paint) -> Iterator[str]:
    """Yield the formulas on one response: those that hold first, below each of the others what fails."""
    yield paint(f"Formulas on {table.name}", "bold")
    yield from wrapped(table.sentence, width)
    lines = [
        [
            Cell(row.name),
            Cell(row.measure),
            Cell(row.gives),
            Cell(row.proved),
            Cell(row.error, "out_of_range" if row.notable else ""),
            Cell(row.side, "quiet"),
            Cell(f"{row.state.shape} {row.state.word}", row.state.key),
            Cell(row.fails, "quiet"),
        ]
        for row in table.rows
    ]
    lines = _aligned(lines, [k for k, column in enumerate(FORMULA_COLUMNS) if column.number])
    if lines:
        widths = fitted(FORMULA_COLUMNS, lines, width)
        headings = [Cell(column.heading, "bold") for column in FORMULA_COLUMNS]
        for line in (headings, *lines):
            yield from _stacked(line, FORMULA_COLUMNS, widths, paint)
    for letter, condition in table.conditions:
        yield from wrapped(f"{letter} {condition}", width, "  ", "    ")
    for words, groups in (("No value here", table.silent), ("Nothing to estimate", table.absent)):
        for names, reason in groups:
            yield from (paint(text, "quiet") for text in wrapped(f"{words}: {names} ({reason})", width, "", "    "))


def _table(review: Review, width: int, paint: _Paint) -> Iterator[str]:
    rows = [row for group in matrix.groups(review) for row in group.rows]
    rows.sort(key=lambda row: row.verdict.weight)
    table = [line for row in rows for line in _rows(row)]
    lines = _aligned([line for line, _ in table], [k for k, column in enumerate(COLUMNS) if column.number])
    widths = fitted(COLUMNS, lines, width)
    yield paint(GAP.join(filled(COLUMNS[k].heading, w, COLUMNS[k].right) for k, w in widths.items()), "bold")
    for line, (_, remark) in zip(lines, table, strict=True):
        yield from _stacked(line, COLUMNS, widths, paint)
        indent = " " * (widths[0] + len(GAP))
        standing = line[STANDING]
        if STANDING not in widths and standing.key:
            yield indent + paint(f"{standing.text}: {line[STANDING + 1].text}", standing.key)
        if remark:
            yield from (paint(text, "quiet") for text in wrapped(remark, width, indent, indent))


def _stacked(line: list[Cell], columns: tuple[Column, ...], widths: dict[int, int], paint: _Paint) -> Iterator[str]:
    """Yield a line of a table as as many as its longest cell needs; numbers are never folded."""
    folds = {k: [line[k].text] if columns[k].least is None else folded(line[k].text, w) for k, w in widths.items()}
    for number in range(max(map(len, folds.values()))):
        texts = {k: fold[number] if number < len(fold) else "" for k, fold in folds.items()}
        yield GAP.join(paint(filled(texts[k], w, columns[k].right), line[k].key) for k, w in widths.items())


def _aligned(table: list[list[Cell]], numbers: list[int]) -> list[list[Cell]]:
    """Return a table in which the numbers of some columns meet at the decimal sign, each with its unit after it."""
    table = [list(line) for line in table]
    for k in numbers:
        halves = [line[k].text.partition(" ") for line in table]
        values = [text.translate(_BLANKS) for text in aligned([value for value, _, _ in halves])]
        widest = max(map(cells, values), default=0)
        for line, value, (_, _, unit) in zip(table, values, halves, strict=True):
            line[k] = Cell(f"{filled(value, widest, right=True)} {unit}".rstrip(), line[k].key)
    return table


_BLANKS = {ord(FIGURE_SPACE): " ", ord(POINT_SPACE): " "}


def _rows(row: matrix.Row) -> Iterator[tuple[list[Cell], str]]:
    """Yield a requirement as lines, what the columns cannot say below each; several limits follow their requirement."""
    if len(row.lines) != 1:
        how = f"{len(row.lines)} limits" if row.lines else row.decided_by if row.decided_by != "criteria" else ""
        blank = [Cell("")] * (len(COLUMNS) - 3)
        yield [_state(row.verdict), Cell(row.id), Cell(how, "quiet"), *blank], "" if _calm(row) else row.reason
    for line in row.lines:
        several = len(row.lines) > 1
        verdict = _state(line.verdict if several else row.verdict)
        cells = [
            Cell(f"  {verdict.text}", verdict.key) if several else verdict,
            Cell("" if several else row.id),
            Cell(line.measure.lower()),
            Cell(line.on),
            Cell(line.result.whole),
            Cell(line.limit),
            Cell(f"{line.reserve} {line.reserve_unit}".strip()),
            _standing(line.standing),
            Cell(line.basis.rpartition(" and ")[2]),
        ]
        yield cells, (line.reason or line.result.note) if line.result.value == "none" else ""


def _calm(row: matrix.Row) -> bool:
    """Tell whether a requirement needs no word of explanation here: it is met, or its limits stand below it."""
    return row.verdict.weight >= 2 or bool(row.lines)


def _levels(findings: tuple[FindingReview, ...]) -> str:
    counts = [(key, sum(f.level == key for f in findings)) for key in LEVELS]
    return ", ".join(counted(number, key) for key, number in counts if number)


def _findings(findings: tuple[FindingReview, ...], width: int, paint: _Paint) -> Iterator[str]:
    for finding in findings:
        at = f"{finding.location.path}:{finding.location.line}:{finding.location.column}"
        status = LEVELS[finding.level]
        lines = list(wrapped(f"{at}: {status.word}: {finding.message} [{finding.rule}]", width, hang="    "))
        yield lines[0].replace(f": {status.word}:", f": {paint(status.word, status.key)}:", 1)
        yield from lines[1:]
        for other in finding.related:
            words = f"{other.path}:{other.line}:{other.column}: {other.message or 'see also'}"
            yield from wrapped(words, width, "    ", "        ")


def _unusable(result: Unusable, width: int, paint: _Paint) -> Iterator[str]:
    outcome = OUTCOMES["unusable"]
    yield paint(f"{outcome.shape} {outcome.word.capitalize()}", outcome.key) + f"  {_levels(result.findings)}"
    yield ""
    yield from _findings(result.findings, width, paint)
