"""What may be read at all: TOML 1.0, UTF-8, 16 MB, 64 levels, regular files; the line of each key."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.reading import read_circuit, read_inputs
from layoutgen.reading.keylines import key_lines, repeated_keys
from layoutgen.reading.source import MAX_BYTES, SourceMap, load
from layoutgen.reading.wording import key_text, split_key

if TYPE_CHECKING:
    from conftest import Files


def only_fault(path: Path) -> Fault:
    """Return the one fault of a file that is no TOML of ours."""
    with pytest.raises(WrongInputError) as caught:
        read_inputs(path)
    assert len(caught.value.faults) == 1, str(caught.value)
    return caught.value.faults[0]


def with_bytes(tmp_path: Path, content: bytes) -> Path:
    path = tmp_path / "faulty.toml"
    path.write_bytes(content)
    return path


class TestKindsOfFile:
    def test_missing(self, tmp_path: Path) -> None:
        """No such file is said so."""
        assert only_fault(tmp_path / "none.toml").found == "no such file"

    def test_directory(self, tmp_path: Path) -> None:
        """A directory is named as what it is."""
        assert only_fault(tmp_path).found == "a directory"

    @pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no pipes in this system's file tree")
    def test_pipe_is_not_waited_for(self, tmp_path: Path) -> None:
        """A named pipe without a writer would block for ever if it were opened to read."""
        os.mkfifo(tmp_path / "pipe.toml")
        assert only_fault(tmp_path / "pipe.toml").found == "no regular file"

    @pytest.mark.skipif(not Path("/dev/zero").exists(), reason="no devices in this system's file tree")
    def test_endless_device(self) -> None:
        """A device that never ends is not read."""
        assert only_fault(Path("/dev/zero")).found == "no regular file"

    def test_unreadable(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        """A file without permission is a fault, not a traceback (made up: root may read all)."""

        def refuse(*_: object) -> int:
            raise PermissionError(13, "Permission denied")

        path = with_bytes(tmp_path, b"format = 1\n")
        monkeypatch.setattr(os, "open", refuse)
        assert "permission denied" in only_fault(path).found

    @pytest.mark.parametrize("name", ["a" * 300 + ".toml", "a\0b.toml", "x.toml/y.toml"])
    def test_impossible_names(self, tmp_path: Path, name: str) -> None:
        """Names that no file can have are faults, and control characters in them are escaped."""
        with_bytes(tmp_path, b"").rename(tmp_path / "x.toml")
        fault = only_fault(tmp_path / name)
        assert "\0" not in str(fault)

    def test_too_large(self, tmp_path: Path) -> None:
        """One byte beyond 16 MB is refused, the last byte within is not."""
        assert "16 MB" in only_fault(with_bytes(tmp_path, b"#" * (MAX_BYTES + 1))).found
        loaded = load(with_bytes(tmp_path, b"#" * MAX_BYTES))
        assert loaded.data == {}

    def test_link_to_a_file_is_followed(self, files: Files) -> None:
        """A link to a regular file is as good as the file."""
        link = files.folder / "link.toml"
        link.symlink_to(files.circuit)
        assert read_circuit(link).design.title == "River gauge driver"


class TestText:
    def test_byte_order_mark_and_crlf(self, files: Files) -> None:
        """Both are skipped, and lines are still counted right."""
        content = files.circuit.read_bytes().replace(b"\n", b"\r\n")
        files.circuit.write_bytes(b"\xef\xbb\xbf" + content)
        expected = files.line("[design]")
        assert files.read().circuit.location("design").line == expected

    @pytest.mark.parametrize(
        ("content", "line", "offset"),
        [
            (b"format = 1\n[design]\ntitle = 'Fl\xfcss'\n", 3, 31),
            ("format = 1\n".encode("utf-16"), 1, 0),
            (bytes(range(256)), 2, 128),
            (b"a = '\xed\xa0\x80'", 1, 5),
            (b"a = '\xc0\xaf'", 1, 5),
            (b"# cut \xe2\x82", 1, 6),
        ],
    )
    def test_not_utf8(self, tmp_path: Path, content: bytes, line: int, offset: int) -> None:
        """Another encoding is named with line and byte offset."""
        fault = only_fault(with_bytes(tmp_path, content))
        assert f"byte offset {offset}," in fault.found
        assert fault.location.line == line

    @pytest.mark.parametrize(
        ("content", "line"),
        [
            (b"format = 1\n[design\n", 2),
            (b"format = 1\ntitle = \n", 2),
            (b"format = 1\n\ntitle = 'a\n", 3),
            (b'format = 1\n\ntitle = """a\nb\n', 3),
            (b"format = 1\na = [{b = 1,\n2\n", 2),
            (b"format = 1\na = '[' \nb", 3),
            (b"format = 1\na = [1,\n2\n", 2),
            (b"format = 1\nzeichen = 1 2\n", 2),
            (b"format = 1\n\x00\n", 2),
            (b"format = 1\rname = 2", 1),
            (b"\x7fELF\x02\x01\x01", 1),
            (b"PK\x03\x04junk", 1),
            (b"format = 1\nd = 2024-13-01\n", 2),
            (b"format = 1\nn = 1__0\n", 2),
            (b'format = 1\ns = "\\q"\n', 2),
        ],
    )
    def test_no_toml(self, tmp_path: Path, content: bytes, line: int) -> None:
        """What TOML 1.0 refuses is one fault at its line, control characters escaped."""
        fault = only_fault(with_bytes(tmp_path, content))
        assert "no valid TOML" in fault.found
        assert fault.location.line == line
        assert str(fault).isprintable()

    def test_integer_of_thousands_of_digits(self, tmp_path: Path) -> None:
        """Python refuses to turn so many digits; that is a fault at its line, too."""
        fault = only_fault(with_bytes(tmp_path, b"format = 1\n\nn = " + b"9" * 5000))
        assert "thousands of digits" in fault.found
        assert fault.location.line == 3


class TestLevels:
    @pytest.mark.parametrize(
        "content",
        [
            b"a = " + b"[" * 65 + b"]" * 65,
            b"a = " + b"[" * 100_000,
            b"a = " + b"{a = " * 1000 + b"1" + b"}" * 1000,
            b"a" + b".a" * 100_000 + b" = 1",
            b"[a" + b".a" * 40 + b"]\nb" + b".b" * 40 + b" = 1",
            b"[[a" + b".a" * 40 + b"]]\nb = " + b"[" * 40 + b"]" * 40,
        ],
    )
    def test_too_deep(self, tmp_path: Path, content: bytes) -> None:
        """Deeper than 64 levels is one fault: no recursion error, no long wait."""
        assert "more than 64 levels" in only_fault(with_bytes(tmp_path, content)).found

    @pytest.mark.parametrize("content", [b"a = " + b"[" * 64 + b"]" * 64, b"a" + b".a" * 63 + b" = 1"])
    def test_deep_enough(self, tmp_path: Path, content: bytes) -> None:
        """64 levels are read."""
        loaded = load(with_bytes(tmp_path, content))
        assert loaded.data is not None
        assert not loaded.faults

    def test_brackets_in_strings_and_comments_are_no_levels(self, tmp_path: Path) -> None:
        """Only brackets that nest are counted."""
        many = b"[" * 200
        content = (
            b"a = '" + many + b"' # " + many + b'\nb = """\n' + many + b'\\"\n"""\nc = "\\"' + many + b'"\n'
        )
        loaded = load(with_bytes(tmp_path, content + b"d = '''" + many + b"'''\n"))
        assert loaded.data is not None
        assert list(loaded.data) == ["a", "b", "c", "d"]

    @pytest.mark.parametrize("unit", [b'\\"', b"'", b'"', b"[]", b"a.", b'"""', b"'''"])
    def test_scan_is_linear(self, tmp_path: Path, unit: bytes) -> None:
        """A megabyte of quotes and brackets is refused at once: a scan that goes back would take hours."""
        only_fault(with_bytes(tmp_path, b'a = "' + unit * (1_000_000 // len(unit))))


class TestRepeats:
    @pytest.mark.parametrize(
        ("old", "new", "key", "first"),
        [
            ("[lines.wall]", "[lines.supply]", "lines.supply", "[lines.supply]"),
            ("[tolerance]", "[ground]", "ground", "[ground]"),
            ("points = 201", "points = 201\npoints = 202", "design.points", "points = 201"),
            ('{ voltage = "100 V"', '{ power = "1 W", voltage = "100 V"', "parts.C1.rating.power", "rating"),
        ],
    )
    def test_both_lines(self, files: Files, old: str, new: str, key: str, first: str) -> None:
        """A table or key written twice is one fault that names both lines, and no other is made up."""
        fault = files.change(old, new).fault()
        assert fault.key == key
        assert f"the first is at line {files.line(first)}" in fault.found

    def test_other_faults_are_still_found(self, files: Files) -> None:
        """What is written twice does not hide the rest of the file, nor the rule file."""
        files.change("points = 201", "points = 201\npoints = 202").change('"0.508 mm"', '"0.508 V"')
        files.change('undercut = "0 um"', 'undercut = "0 V"', rules=True)
        assert [fault.key for fault in files.faults()] == [
            "design.points",
            "substrate.height",
            "copper.undercut",
        ]


class TestKeyLines:
    TEXT = """\
top = 1
[a.b] # heading
c.d = {x = 1, "y z".w = [
  {q = 1}, # comment
  {q = 2},
]}
[[list]]
k = \"\"\"
two lines
\"\"\"
[list.sub]
m = 1
[[list]]
k = 2
"quoted.key" = 3
[a]
e = 1
"""

    @pytest.mark.parametrize(
        ("path", "line"),
        [
            ((), 1),
            (("top",), 1),
            (("a", "b"), 2),
            (("a", "b", "c"), 3),
            (("a", "b", "c", "d", "x"), 3),
            (("a", "b", "c", "d", "y z", "w", 0), 4),
            (("a", "b", "c", "d", "y z", "w", 1, "q"), 5),
            (("list",), 7),
            (("list", 0, "k"), 8),
            (("list", 0, "sub"), 11),
            (("list", 0, "sub", "m"), 12),
            (("list", 1), 13),
            (("list", 1, "k"), 14),
            (("list", 1, "quoted.key"), 15),
            (("a",), 16),
            (("a", "e"), 17),
        ],
    )
    def test_line(self, path: tuple[str | int, ...], line: int) -> None:
        """Dotted and quoted keys, inline tables, lists of tables: each has its line."""
        assert key_lines(self.TEXT)[path] == line

    def test_nothing_is_repeated(self) -> None:
        """Tables that are implied first and written later are not repeated."""
        assert repeated_keys(self.TEXT) == []

    def test_missing_key_is_at_its_heading(self) -> None:
        """A key that is not there is at the table that lacks it, a table that is not there at line 1."""
        source = SourceMap("f", self.TEXT)
        assert source.location("a.b.nothing").line == 2
        assert source.location("a.b.c.d.x.deeper").line == 3
        assert source.location("nothing.at.all").line == 1

    @given(
        st.recursive(
            st.integers(), lambda inner: st.dictionaries(st.text(max_size=4), inner, max_size=3), max_leaves=8
        )
    )
    def test_every_key_of_any_table_has_a_line(self, value: object) -> None:
        """Whatever keys are used, quoted or not, the line map knows them all."""
        text = f"# first\nroot = {_inline(value)}\n"
        lines = key_lines(text)
        for path in _paths(value, ("root",)):
            assert lines[path] == 2

    @given(
        st.lists(
            st.one_of(st.from_regex(r"[A-Za-z0-9_-]+", fullmatch=True), st.just("fence.max_pitch")),
            min_size=1,
        )
    )
    def test_key_text_and_back(self, keys: list[str]) -> None:
        """A printed path can be split again."""
        keys = [key[:64] for key in keys]
        path = (keys[0], 3, *keys[1:])
        assert split_key(key_text(path)) == path


def _inline(value: object) -> str:
    if isinstance(value, dict):
        return "{" + ", ".join(f"{_quoted(key)} = {_inline(item)}" for key, item in value.items()) + "}"
    return str(value)


def _quoted(key: str) -> str:
    return '"' + "".join(f"\\U{ord(c):08x}" if not 0xD800 <= ord(c) < 0xE000 else "?" for c in key) + '"'


def _paths(value: object, path: tuple[str, ...]) -> list[tuple[str, ...]]:
    if not isinstance(value, dict):
        return [path]
    return [path] + [found for key, item in value.items() for found in _paths(item, (*path, _plain(key)))]


def _plain(key: str) -> str:
    return "".join(c if not 0xD800 <= ord(c) < 0xE000 else "?" for c in key)
