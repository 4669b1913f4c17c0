"""The boards shown in docs/rules.md do what their pictures say, and the pictures are those of the boards."""

from __future__ import annotations

import importlib.util
from pathlib import Path
from types import ModuleType

import pytest

from layoutgen.checks import check
from layoutgen.checks.rules import RULES
from tests.checks.scenes import SCENES

DOCS = Path(__file__).parents[2] / "docs"


def script() -> ModuleType:
    """Return the script that makes the pictures."""
    spec = importlib.util.spec_from_file_location("make_rule_pictures", DOCS / "make_rule_pictures.py")
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_every_rule_has_a_picture() -> None:
    """Catches a new rule without one, and a picture of a rule that is gone."""
    assert list(SCENES) == [rule.names[0] for rule in RULES]


@pytest.mark.parametrize("rule", SCENES)
def test_good_and_bad_board(rule: str) -> None:
    """Catches a picture that shows a fault the rule does not find, or a good board that it finds."""
    own = next(entry.names for entry in RULES if rule in entry.names)
    for good in (True, False):
        found = [
            f for f in check(SCENES[rule](good).artwork()).findings if f.rule in own and f.severity != "note"
        ]
        assert bool(found) is not good, [f.text for f in found]


def test_pictures_are_up_to_date() -> None:
    """Catches pictures of boards as they were; mended by: python docs/make_rule_pictures.py."""
    made = script()
    for rule in SCENES:
        for k, name in enumerate(made.names(rule)):
            assert (made.FOLDER / name).read_text("utf-8") == made.picture(rule, k == 0), name
