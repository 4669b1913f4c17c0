"""Checks of ``[layout]``: hints and spine name elements, and each hint suits its element."""

from __future__ import annotations

from collections.abc import Mapping

from layoutgen.reading.checks.exclusive import forbid
from layoutgen.reading.checks.names import element_sections, unknown_name
from layoutgen.reading.circuit_records import Hint
from layoutgen.reading.draft import ELEMENT_TABLES, Draft, Table, given
from layoutgen.reading.validate import misspelt
from layoutgen.reading.wording import Path

__all__ = ["check_layout"]

_ALLOWED = {
    "lines": (("at", "heading"), "a line's hints are leave and route"),
    "coupled": (("at", "heading", "route"), "a coupled pair's hint is leave"),
    "parts": (("leave", "route"), "a part's hints are at and heading"),
    "ports": (("leave", "route", "at", "heading"), "a port is placed by edge and at in its own table"),
}


def check_layout(draft: Draft) -> None:
    """Check the names and the keys of hints and spine."""
    sections = element_sections(draft)
    _check_references(draft, sections)
    hints = given(draft.data, "layout", "hints")
    for name, raw in hints.items() if isinstance(hints, Mapping) else ():
        if name in sections and isinstance(raw, Mapping):
            path = ("layout", "hints", name)
            keys, reason = _ALLOWED[sections[name]]
            forbid(draft.faults, Table(path, raw, frozenset(misspelt(raw, Hint))), keys, reason)
            _check_radial(draft, path, name, raw)


def _check_references(draft: Draft, sections: dict[str, str]) -> None:
    """Check that spine and hints name elements, and the spine each once.

    Elements whose own name is faulty may be meant: no more unknown names than those are forgiven.
    """
    spine, hints = given(draft.data, "layout", "spine"), given(draft.data, "layout", "hints")
    references: list[tuple[Path, str]] = []
    for number, name in enumerate(spine if isinstance(spine, list | tuple) else ()):
        if isinstance(name, str) and not draft.faults.about(("layout", "spine", number)):
            references.append((("layout", "spine", number), name))
    _check_repeats(draft, references)
    for name in hints if isinstance(hints, Mapping) else ():
        path: Path = ("layout", "hints", name)
        references += [(path, name)] if path not in draft.faults.paths else []
    unknown = [(path, name) for path, name in references if name not in sections]
    misnamed = [path for path in draft.faults.paths if len(path) == 2 and path[0] in ELEMENT_TABLES]
    if draft.elements_missed or len({name for _, name in unknown}) <= len(misnamed):
        return
    for path, name in unknown:
        unknown_name(draft, path, name, sections, "a port, line, coupled pair or part")


def _check_repeats(draft: Draft, spine: list[tuple[Path, str]]) -> None:
    """Check that the spine names each element once."""
    seen: set[str] = set()
    for path, name in spine:
        if name in seen:
            draft.faults.add_value(path, name, "each element once")
        seen.add(name)


def _check_radial(draft: Draft, path: tuple[str, ...], name: str, raw: Mapping[str, object]) -> None:
    """Check that no route is asked of a radial stub, which is straight."""
    if "route" in raw and given(draft.data, "lines", name, "shape") == "radial":
        forbid(draft.faults, Table(path, raw, frozenset()), ("route",), "a radial stub's hint is leave")
