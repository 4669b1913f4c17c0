"""The page that follows its circuit file: drawn anew, faults shown meanwhile, the reader's place kept."""

from __future__ import annotations

import re
from collections.abc import Callable

from .conftest import Tab, Watched, report_of, until


def banner(tab: Tab) -> str:
    return str(tab.page.locator(".watch").inner_text())


def test_saving_a_change_brings_it_to_the_page(watched: Watched, open_tab: Callable[..., Tab]) -> None:
    """A page that must be loaded by hand is not watched; one that jumps back to the start is a nuisance."""
    tab = open_tab(watched.address)
    until(lambda: tab.page.locator("#canvas").count() and "Watching" in banner(tab))
    key = tab.page.locator("a[data-zoom^='line:']").first.get_attribute("data-zoom") or ""
    tab.zoom_to(key)
    tab.page.get_by_label("Legend").uncheck()
    tab.page.keyboard.press("Shift+ArrowDown")
    before = tab.colours(0)
    title = re.search(r'title = "(.*)"', watched.circuit.read_text("utf-8"))
    assert title
    watched.change(title[0], 'title = "Gauge, second issue"')
    until(lambda: tab.page.title() == "Gauge, second issue")
    until(lambda: tab.page.locator("#panel h3").count())
    assert key.replace(":", " ") in tab.panel
    assert not tab.page.get_by_label("Legend").is_checked()
    after = tab.colours(0)
    same = sum(a == b for a, b in zip(before, after, strict=True))
    assert same > 0.95 * len(before)


def test_faults_are_shown_while_the_file_is_wrong(watched: Watched, open_tab: Callable[..., Tab]) -> None:
    """While one types the file is often wrong: the picture stays, the fault is told, and both recover."""
    tab = open_tab(watched.address)
    until(lambda: tab.page.locator("#canvas").count() and "Watching" in banner(tab))
    good = report_of(watched.folder)
    watched.change("format = 1", "format = 1\nwidht = 3")
    until(lambda: "1 fault" in banner(tab))
    assert "widht" in banner(tab)
    assert "gauge.toml:" in banner(tab)
    assert "last drawing that could be made" in banner(tab)
    assert tab.page.locator("#canvas").is_visible()
    assert report_of(watched.folder) == good, "a faulty file must not touch what was drawn"
    watched.change("\nwidht = 3", "")
    until(lambda: "Watching" in banner(tab))
    assert "widht" not in banner(tab)


def test_a_server_that_ends_is_noticed(watched: Watched, open_tab: Callable[..., Tab]) -> None:
    """A page that silently stops following shows an old board as the new one."""
    tab = open_tab(watched.address)
    until(lambda: "Watching" in banner(tab))
    watched.process.terminate()
    until(lambda: "no longer follows" in banner(tab))
    tab.page.close()
    # that the browser itself reports the lost connection is all right
    assert [complaint for complaint in tab.complaints if "net::ERR_" not in complaint] == []
    tab.complaints.clear()
