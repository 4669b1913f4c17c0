"""The page's script: plain JavaScript files of this folder, put into the page as one; nothing is built."""

from __future__ import annotations

import base64
import hashlib
from functools import cache
from importlib.resources import files

__all__ = ["SCRIPTS", "content_policy", "script"]

SCRIPTS = ("page_model.js", "page_paint.js", "page_view.js", "page_plots.js", "page_watch.js", "page.js")
"""The files, in the order in which they are joined; the last one starts the page."""


@cache
def script() -> str:
    """Return the joined script; its names stay inside one block."""
    folder = files("layoutgen.writers")
    texts = [folder.joinpath(name).read_text("utf-8") for name in SCRIPTS]
    return '"use strict";\n{\n' + "\n".join(texts) + "}\n"


def content_policy(style: str, live: bool) -> str:
    """Return the page's content policy: this script, this style sheet, and no request to anywhere.

    Args:
        style: The text of the page's only style element.
        live: True for a page that asks the server it came from for news.
    """
    connect = "; connect-src 'self'" if live else ""
    return (
        f"default-src 'none'; script-src '{_digest(script())}'; style-src '{_digest(style)}'; "
        f"img-src data:; base-uri 'none'; form-action 'none'{connect}"
    )


def _digest(text: str) -> str:
    return "sha256-" + base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()
