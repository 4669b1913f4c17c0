"""A faultless pair of files, and a way to break them: shared by the tests of reading."""

from __future__ import annotations

from pathlib import Path

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.reading import Inputs, read_inputs

HERE = Path(__file__).parent


class Files:
    """A folder with the two faultless files, which a test changes and reads."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.circuit = folder / "gauge.toml"
        self.rules = folder / "house.toml"
        for path in (self.circuit, self.rules):
            path.write_bytes((HERE / path.name).read_bytes())
        (folder / "c1.s2p").write_text("# GHz S MA R 50\n", encoding="utf-8")

    def _path(self, rules: bool) -> Path:
        return self.rules if rules else self.circuit

    def change(self, old: str, new: str, *, rules: bool = False) -> Files:
        """Replace one text, found exactly once, of the circuit or rule file."""
        path = self._path(rules)
        text = path.read_text(encoding="utf-8")
        assert text.count(old) == 1, f"{old!r} is there {text.count(old)} times"
        path.write_text(text.replace(old, new), encoding="utf-8")
        return self

    def append(self, text: str, *, rules: bool = False) -> Files:
        """Add text at the end of the circuit or rule file."""
        path = self._path(rules)
        path.write_text(path.read_text(encoding="utf-8") + text, encoding="utf-8")
        return self

    def read(self) -> Inputs:
        return read_inputs(self.circuit)

    def faults(self) -> tuple[Fault, ...]:
        """Read and return the faults; fail when there are none."""
        with pytest.raises(WrongInputError) as caught:
            self.read()
        return caught.value.faults

    def fault(self) -> Fault:
        """Read and return the only fault."""
        faults = self.faults()
        assert len(faults) == 1, "\n".join(map(str, faults))
        return faults[0]

    def line(self, text: str, *, rules: bool = False) -> int:
        """Return the 1-based line of the first place of a text."""
        content = self._path(rules).read_text(encoding="utf-8")
        assert text in content, text
        return content[: content.index(text)].count("\n") + 1


@pytest.fixture
def files(tmp_path: Path) -> Files:
    return Files(tmp_path)
