"""report.html: one self-contained page for the person who decides; opens from disk, prints, light and dark.

What it says, in this order: the verdict, the picture, the findings, what was not checked, the lines with
their length budgets, parts, ports, bias, response, cautions.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks import Finding
from layoutgen.numbers import fixed, mm_short
from layoutgen.units import quantity_text
from layoutgen.writers.html import Cell, cell, escape, items, section, table, zoom_link
from layoutgen.writers.page_board import board_data, finding_target, inline_json
from layoutgen.writers.page_currents import current_map_section
from layoutgen.writers.page_response import response_numbers, response_section
from layoutgen.writers.page_script import content_policy, script
from layoutgen.writers.page_style import STYLE
from layoutgen.writers.page_tables import bias_tables, line_tables, part_table, port_table, strip_table
from layoutgen.writers.page_viewer import board_figure
from layoutgen.writers.records import Job, Result

__all__ = ["empty_page", "report_page", "write_report_html"]

_CAUTIONS = (
    "Radio-frequency power burns, and the burn goes deep before it hurts: never touch or probe a powered "
    "output line, stub or open port; end every RF port in a load that takes the power.",
    "The bias supplies can drive currents that weld and burn, and voltages that must be treated with "
    "respect. Set current limits, apply gate bias before drain bias, remove it last, and discharge the "
    "capacitor banks before touching the board.",
    "Power packages may hold beryllium oxide (beryllia), whose dust is poisonous: never grind, break, sand "
    "or burn one, and dispose of it as its maker says.",
    "The flange and the copper around it stay hot after the power is off. The flange carries heat and "
    "ground: mount it on a flat carrier with the torque and compound its maker states.",
    "Solder and flux fumes harm the lungs: work under extraction, wash hands, and mind lead where it is "
    "used.",
    "Transmitting needs a licence in most places, and so may the work on it. Local codes, the equipment's "
    "own instructions and the judgement of a licensed or otherwise qualified person come before anything "
    "on this page.",
)

_FOOTER = (
    "<footer><p>Computed by layoutgen from closed formulas, not by a field solver: "
    "see what was not checked.</p></footer>"
)

_THEME = '<button type="button" id="theme" aria-pressed="false">Dark</button>'
"""The theme's switch; it is seen where scripts run."""

_SECTIONS = (
    ("board", "Board"),
    ("findings", "Findings"),
    ("not-checked", "Not checked"),
    ("lines", "Lines"),
    ("parts", "Parts"),
    ("ports", "Ports"),
    ("bias", "Bias"),
    ("response", "Response"),
    ("cautions", "Cautions"),
    ("files", "Files"),
)


def write_report_html(result: Result, job: Job) -> bytes:
    """Return the page; ``job.files`` gives the picture, and the files' names and sizes."""
    return report_page(result, job)


def report_page(result: Result, job: Job, version: str = "") -> bytes:
    """Return the page, for a server that draws anew with the drawing's version.

    Args:
        result: Every stage's result.
        job: As for any writer.
        version: Not empty: the page asks the server it came from for another version, at ``events``.
    """
    data = [_data("board-data", board_data(result))]
    if result.response is not None:
        middle = result.circuit.file.design.frequency
        data.append(_data("plot-data", response_numbers(result.response, middle)))
    body = "".join(_body(result, job))
    return _page(result.circuit.file.design.title, body, "".join(data), version or None)


def empty_page(title: str) -> bytes:
    """Return the page of a server that has no drawing yet; it asks for the first one, at ``events``."""
    body = f"<header>{_THEME}<h1>{escape(title)}</h1></header><main><p>Nothing has been drawn yet.</p></main>"
    return _page(title, body, "", "")


def _data(name: str, data: object) -> str:
    return f'<script type="application/json" id="{name}">{inline_json(data)}</script>\n'


def _page(title: str, body: str, data: str, version: str | None) -> bytes:
    """Return a whole page; ``version`` None is one that asks nobody for news."""
    live = "" if version is None else f'<meta name="layoutgen-watch" content="{escape(version)}">'
    policy = content_policy(STYLE, live=version is not None)
    page = (
        f'<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8"><title>{escape(title)}</title>'
        f'<meta http-equiv="Content-Security-Policy" content="{policy}">'
        f'<meta name="viewport" content="width=device-width, initial-scale=1">{live}'
        f"<style>{STYLE}</style></head>\n<body>{body}\n{data}<script>{script()}</script></body></html>\n"
    )
    return page.encode("utf-8")


def _body(result: Result, job: Job) -> Iterator[str]:
    yield _header(result)
    yield "<main>"
    yield section("board", "Board", board_figure(result, job), _board_text(result))
    yield section("findings", "Findings", *_findings(result))
    yield section("not-checked", "Not checked", *_not_checked(result))
    yield section("lines", "Lines", *line_tables(result), strip_table(result))
    yield section("parts", "Parts", part_table(result))
    yield section("ports", "Ports", port_table(result))
    yield section("bias", "Bias", *bias_tables(result), *current_map_section(result))
    yield section("response", "Response", *response_section(result))
    yield section("cautions", "Cautions", f'<div class="caution">{items(map(escape, _CAUTIONS))}</div>')
    yield section("files", "Files", _files(job))
    yield "</main>"
    yield _FOOTER


def _header(result: Result) -> str:
    design = result.circuit.file.design
    revision = f' <span class="soft">revision {escape(design.revision)}</span>' if design.revision else ""
    low, high = (quantity_text(f, "frequency") for f in design.band)
    middle = quantity_text(design.frequency, "frequency")
    links = "".join(f'<a href="#{anchor}">{name}</a>' for anchor, name in _SECTIONS)
    return (
        f"<header>{_THEME}<h1>{escape(design.title)}{revision}</h1>"
        f'<p class="soft">{low} to {high}, designed at {middle}</p>{_verdict(result)}'
        f'<nav aria-label="Sections">{links}</nav></header>'
    )


def _verdict(result: Result) -> str:
    """Return the verdict in one sentence, and how many findings of each kind there are."""
    errors, warnings, notes = (result.count(severity) for severity in ("error", "warning", "note"))
    waived = sum(finding.waived is not None for finding in result.findings)
    kind, words = "good", "No finding of severity error."
    if errors:
        kind, words = "bad", f"{_many(errors, 'error')}: do not have this board made as it is."
    elif warnings:
        kind, words = "warn", "No finding of severity error; the warnings want a look."
    counts = f"{_many(errors, 'error')}, {_many(warnings, 'warning')}, {_many(notes, 'note')}"
    waivers = f", {waived} waived" if waived else ""
    unchecked = len(result.checks.not_checked)
    return (
        f'<div class="verdict {kind}"><strong>{words}</strong>'
        f'<br>{counts}{waivers}; <a href="#not-checked">{_many(unchecked, "matter")} not checked</a>.</div>'
    )


def _many(count: int, noun: str) -> str:
    return f"{count} {noun}{'' if count == 1 else 's'}"


def _board_text(result: Result) -> str:
    file, rules, placement = result.circuit.file, result.circuit.rules, result.placement
    substrate = file.substrate
    texts = [
        f"Board {mm_short(placement.width)} x {mm_short(placement.height)} mm; origin at its south-west "
        "corner, x east, y north; seen from the top, nothing mirrored.",
        f"Substrate: relative permittivity {substrate.relative_permittivity:g}, loss tangent "
        f"{substrate.loss_tangent:g}, height {quantity_text(substrate.height, 'length')}, copper "
        f"{quantity_text(substrate.copper_thickness, 'length')} with rms roughness "
        f"{quantity_text(substrate.copper_roughness, 'length')}.",
        f"Board house: {rules.name}" + (f" ({rules.source})." if rules.source else "."),
        f"{len(result.artwork.vias)} vias, {_many(len(result.artwork.holes), 'other hole')}.",
    ]
    return items(map(escape, texts))


def _findings(result: Result) -> Iterator[str]:
    if not result.findings:
        yield "<p>None.</p>"
        return
    yield table(
        "Findings, numbered as in the picture",
        ("No.", "Severity", "Rule", "Items", "Measured", "Limit", "At (mm)", "What"),
        (_finding_row(result, number, finding) for number, finding in enumerate(result.findings, start=1)),
        [f"finding-{number}" for number in range(1, len(result.findings) + 1)],
    )


def _finding_row(result: Result, number: int, finding: Finding) -> list[Cell]:
    severity = f'<span class="{finding.severity}">{finding.severity}</span>'
    if finding.waived is not None:
        severity = f"waived {finding.severity}"
    text = escape(finding.text) + (
        f"<br><small>waived: {escape(finding.waived)}</small>" if finding.waived else ""
    )
    at = None if finding.at is None else f"{fixed(finding.at[0] / 1e6, 3)}, {fixed(finding.at[1] / 1e6, 3)}"
    has_place = finding.at is not None or finding_target(result, finding)
    return [
        zoom_link(f"finding:{number}", number) if has_place else str(number),
        severity,
        escape(finding.rule),
        cell(", ".join(finding.items)),
        _figure_text(finding.measured, finding.unit),
        _figure_text(finding.limit, finding.unit),
        cell(at),
        text,
    ]


def _figure_text(value: float | None, unit: str) -> Cell:
    return cell(None) if value is None else escape(f"{value:.4g} {unit}".strip())


def _not_checked(result: Result) -> Iterator[str]:
    yield "<p>Nothing below has been looked at; it neither passed nor failed.</p>"
    rows = ((escape(item.rule), escape(item.reason)) for item in result.checks.not_checked)
    yield table("What was not checked, and why", ("Rule or matter", "Reason"), rows)


def _files(job: Job) -> str:
    rows = ((escape(name), f"{len(data)} bytes") for name, data in job.files.items())
    return table("Files written beside this page; report.json holds their hashes", ("File", "Size"), rows)
