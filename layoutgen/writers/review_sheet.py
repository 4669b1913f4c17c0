"""Review sheets as PDF: the board at 1:1, verdict, dimensions, budgets, waivers, what was not checked."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from fractions import Fraction

from layoutgen.checks import Finding
from layoutgen.numbers import fixed, mm_short
from layoutgen.placement import PlacedLine, PlacedPair
from layoutgen.sizing import BudgetEntry
from layoutgen.writers.board_view import PAD, BoardView
from layoutgen.writers.flow import Flow
from layoutgen.writers.plain import many
from layoutgen.writers.records import Job, Result
from layoutgen.writers.response_files import TRACE_HEADS, trace_values
from layoutgen.writers.scene import marked_findings
from layoutgen.writers.sheet import INK, MARGIN, Book, Sheet, paper_for

__all__ = ["verdict", "write_review_sheet"]

_KIND = "Review"
_AROUND, _FOOT = 12.0, 62.0
_BAR_MM = 50.0
_MARKS = {"error": "#c1272d", "warning": "#b07d00"}

_LINE_HEADS = (
    "Line", "Nets", "Asked (ohm)", "Drawn (ohm)", "Width (mm)", "Centre-line (mm)", "Angle (deg)",
    "Pour left, right (mm)", "Permittivity", "Current (A)", "Loss (dB)",
)  # fmt: skip
_PAIR_HEADS = ("Pair", "Nets", "Even, odd (ohm)", "Width (mm)", "Gap (mm)", "Centre-line (mm)", "Angle (deg)")
_RADIAL_HEADS = ("Radial stub", "Net", "Sector (deg)", "Inner radius (mm)", "Outer radius (mm)")
_FINDING_HEADS = ("No", "Severity", "Rule", "Items", "Measured", "Limit", "What")


def write_review_sheet(result: Result, job: Job) -> bytes:
    """Return the sheets as PDF; they are the same for equal results."""
    design = result.circuit.file.design
    details = (job.stem, f"revision {design.revision or 'none'}")
    book = Book(_KIND, design.title, details)
    _board_sheet(book, result)
    flow = Flow(lambda: book.sheet("dimensions, budgets, findings"))
    _dimensions(flow, result)
    _budgets(flow, result)
    _response(flow, result)
    _findings(flow, result)
    return book.pdf()


def verdict(result: Result) -> str:
    """Return in one sentence what the checks say."""
    errors, warnings = result.count("error"), result.count("warning")
    waived = sum(finding.waived is not None for finding in result.findings)
    open_checks = many(len(result.checks.not_checked), "rule")
    head = f"NOT CLEAN: {many(errors, 'error')}" if errors else "No errors"
    return (
        f"{head}; {many(warnings, 'warning')}, {many(result.count('note'), 'note')}, {waived} waived; "
        f"{open_checks} not checked (listed at the end)."
    )


def _board_sheet(book: Book, result: Result) -> None:
    """Draw the board at 1:1 on a sheet large enough for it, and the verdict below."""
    width, height = result.placement.width / 1e6, result.placement.height / 1e6
    around = 2.0 * (MARGIN + 4.0 + _AROUND)
    sheet = book.sheet("board at 1:1", paper_for(width + around, height + around + _FOOT + 14.0))
    left, low, right, high = sheet.room
    x = left + max(_AROUND, (right - left - width) / 2.0)
    y = low + _FOOT + max(_AROUND, (high - low - _FOOT - height) / 2.0)
    view = BoardView(sheet, x, y, Fraction(1))
    view.profile(result, fill="#ffffff")
    view.copper(result, lambda shape: shape.role == "pour", "#f0ddca")
    view.copper(result, lambda shape: shape.role not in ("pour", "pad"), "#ad5f2c")
    view.copper(result, lambda shape: shape.role == "pad", PAD)
    view.draw(result.artwork.on("legend_top"), INK)
    view.drills(result, crosses=False)
    view.profile(result)
    _marks(view, result)
    _ruler(sheet, left, low + 30.0)
    flow = Flow(
        lambda: book.sheet("verdict, continued"), sheet, (left + _BAR_MM + 24.0, low, right, low + _FOOT)
    )
    flow.heading("Verdict", keep=6.0)
    colour = _MARKS["error"] if result.count("error") else INK
    flow.paragraph(verdict(result), 3.2, bold=True, pen=colour)
    for text in _about(result):
        flow.paragraph(text)


def _about(result: Result) -> Iterator[str]:
    file, rules = result.circuit.file, result.circuit.rules
    size = f"{mm_short(result.placement.width)} x {mm_short(result.placement.height)} mm"
    yield (
        f"Board {size}, substrate {fixed(file.substrate.height * 1e3, 3)} mm of permittivity "
        f"{fixed(file.substrate.relative_permittivity, 3)}, rule file “{rules.name}”."
    )
    low, high = (fixed(f / 1e9, 4) for f in file.design.band)
    yield f"Band {low} to {high} GHz, angles at {fixed(file.design.frequency / 1e9, 4)} GHz."
    placement, artwork = result.placement, result.artwork
    counts = (
        (len(placement.lines), "line"),
        (len(placement.pairs), "coupled pair"),
        (len(placement.radials), "radial stub"),
        (len(placement.parts), "part"),
        (len(artwork.vias), "via"),
        (len(artwork.holes), "hole"),
    )
    yield ", ".join(many(count, noun) for count, noun in counts if count) + "."


def _marks(view: BoardView, result: Result) -> None:
    """Draw a ring and the number of each finding that has a place."""
    for number, finding in marked_findings(result.findings):
        if finding.at is not None:
            x, y = view.at(*finding.at)
            colour = _MARKS.get(finding.severity, INK)
            view.sheet.circle(x, y, 1.6, None, colour, 0.35)
            view.sheet.text(x + 2.0, y + 1.2, str(number), 2.6, bold=True, pen=colour)


def _ruler(sheet: Sheet, x: float, y: float) -> None:
    """Draw two bars of 50 mm, to see whether a print is at 1:1."""
    for points in (
        [(x, y + 2.0), (x, y), (x + _BAR_MM, y), (x + _BAR_MM, y + 2.0)],
        [
            (x + _BAR_MM + 10.0, y - 25.0),
            (x + _BAR_MM + 8.0, y - 25.0),
            (x + _BAR_MM + 8.0, y + 25.0),
            (x + _BAR_MM + 10.0, y + 25.0),
        ],
    ):
        sheet.line(points, 0.3)
    sheet.text(x, y - 4.5, "50 mm each way when printed at 1:1", 2.6)


def _dimensions(flow: Flow, result: Result) -> None:
    """Write what was drawn: lines, pairs, radial stubs, strips."""
    flow.heading("Dimensions")
    if result.placement.lines:
        flow.table(_LINE_HEADS, _line_rows(result), numbers=range(2, 11))
    if result.placement.pairs:
        flow.table(_PAIR_HEADS, _pair_rows(result), numbers=range(2, 7))
    if result.placement.radials:
        rows = [
            (r.name, r.nets[0], fixed(r.sector_deg, 2), _mm(r.inner_radius), _mm(r.outer_radius))
            for r in result.placement.radials.values()
        ]
        flow.table(_RADIAL_HEADS, rows, numbers=range(2, 5))
    if result.placement.strips:
        heads = ("Strip (copper that no line stands for)", "Net", "Width (mm)", "Current (A)")
        strips = [(s.name, s.net, _mm(s.width), fixed(abs(s.current), 3)) for s in result.placement.strips]
        flow.table(heads, strips, numbers=(2, 3))


def _line_rows(result: Result) -> list[tuple[str, ...]]:
    rows: list[tuple[str, ...]] = []
    for line in result.placement.lines.values():
        sized, copper = result.sized.lines[line.name], result.artwork.line_copper.get(line.name)
        gaps = (copper.gap_left, copper.gap_right) if copper else (None, None)
        rows.append(
            (
                line.name,
                ", ".join(line.nets),
                "" if sized.asked_impedance is None else fixed(sized.asked_impedance, 2),
                fixed(sized.impedance, 2),
                _mm(line.width),
                fixed(line.centre_line / 1e6, 4),
                fixed(math.degrees(line.angle), 3),
                ", ".join("none" if gap is None else fixed(gap / 1e6, 3) for gap in gaps),
                fixed(sized.effective_permittivity, 4),
                fixed(abs(sized.current), 3),
                fixed(sized.loss * line.centre_line * 1e-9, 4),
            )
        )
    return rows


def _pair_rows(result: Result) -> list[tuple[str, ...]]:
    return [
        (
            pair.name,
            ", ".join(pair.nets),
            f"{fixed(sized.even_impedance, 2)}, {fixed(sized.odd_impedance, 2)}",
            _mm(pair.width),
            _mm(pair.gap),
            fixed(pair.centre_line / 1e6, 4),
            fixed(math.degrees(pair.angle), 3),
        )
        for pair in result.placement.pairs.values()
        for sized in [result.sized.pairs[pair.name]]
    ]


def _budgets(flow: Flow, result: Result) -> None:
    """Write the length budgets: one column for each cause that occurs."""
    named: list[PlacedLine | PlacedPair] = [
        *result.placement.lines.values(),
        *result.placement.pairs.values(),
    ]
    if not named:
        return
    flow.heading("Length budgets, in degrees at the design frequency")
    flow.paragraph(
        "“line” is the drawn centre-line; the other entries are what its ends and bends add. All entries "
        "of a row add up to the angle asked for."
    )
    causes = list(dict.fromkeys(entry.cause for line in named for entry in line.budget))
    heads = ["Line", *(cause.replace("_", " ") for cause in causes), "Sum", "Angle"]
    rows = [
        (
            line.name,
            *(_entries([entry for entry in line.budget if entry.cause == cause]) for cause in causes),
            fixed(math.degrees(math.fsum(entry.angle for entry in line.budget)), 3),
            fixed(math.degrees(line.angle), 3),
        )
        for line in named
    ]
    flow.table(heads, rows, numbers=range(1, len(heads)))


def _entries(entries: Sequence[BudgetEntry]) -> str:
    """Return the entries of one cause with their places, those that round to zero left out."""
    shown = [(fixed(math.degrees(entry.angle), 3), entry) for entry in entries]
    return "; ".join(
        text if entry.cause == "line" else f"{text} ({entry.at})" for text, entry in shown if float(text)
    )


def _response(flow: Flow, result: Result) -> None:
    if result.response is None:
        return
    flow.heading("Response as wanted and as drawn, to the ports' own impedances")
    flow.table(TRACE_HEADS, trace_values(result.response), numbers=range(1, 8))


def _findings(flow: Flow, result: Result) -> None:
    """Write findings, waivers, notes, and what was not checked."""
    numbered = list(enumerate(result.findings, start=1))
    counting = [(n, f) for n, f in numbered if f.waived is None and f.severity != "note"]
    flow.heading("Findings")
    if counting:
        flow.table(_FINDING_HEADS, [_finding_row(n, f) for n, f in counting], numbers=(0, 4, 5))
    else:
        flow.paragraph("None.")
    flow.heading("Waivers")
    waived = [
        (str(n), f.rule, ", ".join(f.items), f.waived or "", f.text)
        for n, f in numbered
        if f.waived is not None
    ]
    if waived:
        flow.table(("No", "Rule", "Items", "Reason", "What was waived"), waived, numbers=(0,))
    else:
        flow.paragraph("None.")
    flow.heading("Assumptions")
    assumed = [
        (str(n), f.rule, ", ".join(f.items), f.text)
        for n, f in numbered
        if f.severity == "note" and f.waived is None
    ]
    if assumed:
        flow.table(("No", "Rule", "Items", "What was assumed"), assumed, numbers=(0,))
    else:
        flow.paragraph("None.")
    flow.heading("Not checked")
    flow.table(("Rule", "Reason"), [(item.rule, item.reason) for item in result.checks.not_checked])


def _finding_row(number: int, finding: Finding) -> tuple[str, ...]:
    return (
        str(number),
        finding.severity,
        finding.rule,
        ", ".join(finding.items),
        _value(finding.measured, finding.unit),
        _value(finding.limit, finding.unit),
        finding.text,
    )


def _value(value: float | None, unit: str) -> str:
    return "" if value is None or not math.isfinite(value) else f"{fixed(value, 4)} {unit}".strip()


def _mm(nm: int) -> str:
    return fixed(nm / 1e6, 4)
