"""Rules on mask and legend."""

from __future__ import annotations

import pytest

from tests.checks.boards import Sheet, box, near, only, polygon

EXPANSION = {"mask": {"expansion": "0.05 mm"}}
WEB = {"mask": {"min_web": "0.1 mm"}}


def padded(rules: dict[str, dict[str, str]]) -> Sheet:
    """Return C1 with two pads of 1 mm at x = 10 and x = 12."""
    sheet = Sheet(rules)
    sheet.part("C1", {"1": ("c", 10, 10, 1, 1), "2": ("d", 12, 10, 1, 1)})
    return sheet


@pytest.mark.parametrize(("expansion", "faults"), [(0.05, 0), (0.049, 1)])
def test_expansion(expansion: float, faults: int) -> None:
    """Catches an opening passed that is too small on one side, or found at the limit."""
    sheet = padded(EXPANSION)
    sheet.opening(box(9.45, 9.45, 10.5 + expansion, 10.55))
    sheet.opening(box(11.45, 9.45, 12.55, 10.55))
    found = sheet.found("mask.expansion")
    assert len(found) == faults
    if found:
        assert found[0].items == ("C1",)
        assert found[0].measured == pytest.approx(expansion)
        assert near(found[0], 10.5 + expansion / 2, 10, 0.51)


def test_missing_opening() -> None:
    """Catches a pad that is covered as a whole passed for want of an opening to measure."""
    sheet = padded(EXPANSION)
    sheet.opening(box(9.45, 9.45, 10.55, 10.55))
    finding = only(sheet.found("mask.expansion"))
    assert near(finding, 12, 10, 0.1)
    assert "1.0000 mm^2" in finding.text


def test_one_opening_over_both_pads() -> None:
    """Catches openings that were joined, as over bare lines, found for reaching beyond a pad."""
    sheet = padded(EXPANSION)
    sheet.opening(box(5, 9.45, 15, 10.55))
    assert sheet.found("mask.expansion") == []


def test_openings_of_overlapping_pieces() -> None:
    """Catches openings judged piece by piece: together they clear the pad."""
    sheet = padded(EXPANSION)
    sheet.opening(box(9.4, 9.45, 10.1, 10.55))
    sheet.opening(box(10.0, 9.45, 12.6, 10.55))
    assert sheet.found("mask.expansion") == []


@pytest.mark.parametrize(("web", "faults"), [(0.1, 0), (0.099, 1)])
def test_web_between_openings(web: float, faults: int) -> None:
    """Catches a web passed below the limit, or found at it."""
    sheet = padded(WEB)
    sheet.opening(box(9.4, 9.4, 11, 10.6))
    sheet.opening(box(11 + web, 9.4, 12.6, 10.6))
    found = sheet.found("mask.min_web")
    assert len(found) == faults
    if found:
        assert found[0].items == ("C1",)
        assert found[0].layer == "soldermask_top"
        assert near(found[0], 11 + web / 2, 10, 0.61)


def test_web_within_one_opening() -> None:
    """Catches a tongue of mask in one opening left out."""
    sheet = padded(WEB)
    sheet.opening(polygon((9, 9), (13, 9), (13, 11), (11.05, 11), (11.05, 9.5), (11, 9.5), (11, 11), (9, 11)))
    finding = only(sheet.found("mask.min_web"))
    assert finding.measured == pytest.approx(0.05)


@pytest.mark.parametrize(("width", "faults"), [(0.12, 0), (0.119, 1)])
def test_legend_line(width: float, faults: int) -> None:
    """Catches a stroke passed below the limit, or found at it."""
    sheet = Sheet({"legend": {"min_line": "0.12 mm"}})
    sheet.ink(box(5, 5, 7, 5 + width), "C1")
    found = sheet.found("legend.min_line")
    assert len(found) == faults
    assert all(f.items == ("C1",) and f.severity == "warning" for f in found)


@pytest.mark.parametrize(("away", "faults"), [(0.15, 0), (0.149, 1)])
def test_legend_distance(away: float, faults: int) -> None:
    """Catches legend passed too near an opening, or found at the limit."""
    sheet = padded({"legend": {"min_distance": "0.15 mm"}})
    sheet.opening(box(9.4, 9.4, 10.6, 10.6), "C1")
    sheet.ink(box(9, 10.6 + away, 11, 11.5), "R1")
    found = sheet.found("legend.min_distance")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"R1", "C1"}
        assert near(found[0], 10, 10.6 + away / 2, 0.61)


def test_legend_on_a_pad() -> None:
    """Catches legend on a pad passed where the mask has no opening."""
    sheet = padded({"legend": {"min_distance": "0.15 mm"}})
    sheet.ink(box(9.9, 9.9, 10.1, 10.1), "R1")
    assert only(sheet.found("legend.min_distance")).measured == 0.0


def test_a_pad_off_the_board_needs_no_opening() -> None:
    """Catches a crash over a pad that nothing of lies on the board: its place is the edge rule's matter."""
    sheet = Sheet(EXPANSION)
    sheet.part("C1", {"1": ("c", -10, 10, 1, 1), "2": ("d", -8, 10, 1, 1)})
    assert sheet.found("mask.expansion") == []
