"""The line of every key of a TOML text, from its parse tree (tree-sitter), and keys that are written twice.

Called only for texts that were found to be nested no deeper than the file's limit, so recursion is bounded.
"""

from __future__ import annotations

import tomllib
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from layoutgen.reading.wording import Path

if TYPE_CHECKING:
    from tree_sitter import Node

__all__ = ["Repeated", "key_lines", "repeated_keys"]


@dataclass(frozen=True, slots=True)
class Repeated:
    """A key or table that is written a second time.

    Args:
        path: The key's path.
        first: Line of the first [-].
        second: Line of the second [-].
        span: First and last byte of what the second one holds, in the UTF-8 text [-].
    """

    path: Path
    first: int
    second: int
    span: tuple[int, int]


@dataclass
class _Index:
    """Lines while they are collected."""

    lines: dict[Path, int] = field(default_factory=lambda: {(): 1})
    implied: set[Path] = field(default_factory=set)
    lengths: dict[Path, int] = field(default_factory=dict)
    repeated: list[Repeated] = field(default_factory=list)

    def put(self, path: Path, node: Node, above: int) -> bool:
        """Note a key that is written out, and the tables it implies below the first ``above`` keys.

        Returns False for a key that was there before.
        """
        line = node.start_point[0] + 1
        for length in range(above + 1, len(path)):
            if path[:length] not in self.lines:
                self.lines[path[:length]] = line
                self.implied.add(path[:length])
        if path in self.lines and path not in self.implied:
            self.repeated.append(Repeated(path, self.lines[path], line, (node.start_byte, node.end_byte)))
            return False
        self.implied.discard(path)
        self.lines[path] = line
        return True


def key_lines(text: str) -> dict[Path, int]:
    """Return key path -> 1-based line, list items included; the empty path is line 1."""
    return _indexed(text).lines


def repeated_keys(text: str) -> list[Repeated]:
    """Return the keys and tables that are written a second time, in file order."""
    return _indexed(text).repeated


def _indexed(text: str) -> _Index:
    """Walk the parse tree of a text."""
    import tree_sitter
    import tree_sitter_toml

    parser = tree_sitter.Parser(tree_sitter.Language(tree_sitter_toml.language()))
    index = _Index()
    for node in parser.parse(text.encode("utf-8", "surrogatepass")).root_node.named_children:
        if node.type == "pair":
            _add_pair(index, (), node)
        elif node.type in ("table", "table_array_element"):
            _add_table(index, node)
    return index


def _add_table(index: _Index, node: Node) -> None:
    """Note a table's heading and its keys."""
    children = node.named_children
    if not children or not children[0].type.endswith("key"):
        return
    path = _within_lists(index, _keys(children[0]))
    if node.type == "table_array_element":
        item = index.lengths.get(path, 0)
        index.lengths[path] = item + 1
        index.lines.setdefault(path, node.start_point[0] + 1)
        path = (*path, item)
    if not index.put(path, node, 0):
        return
    for child in children[1:]:
        if child.type == "pair":
            _add_pair(index, path, child)


def _within_lists(index: _Index, keys: Path) -> Path:
    """Return a heading's path with the index of the latest item of each list of tables on its way."""
    path: Path = ()
    for key in keys[:-1]:
        path = (*path, key)
        if path in index.lengths:
            path = (*path, index.lengths[path] - 1)
    return (*path, *keys[-1:])


def _add_pair(index: _Index, prefix: Path, node: Node) -> None:
    """Note a key and what its value holds."""
    children = node.named_children
    if len(children) < 2:
        return
    path = (*prefix, *_keys(children[0]))
    if index.put(path, node, len(prefix)):
        _add_value(index, path, children[-1])


def _add_value(index: _Index, path: Path, node: Node) -> None:
    """Note the keys of an inline table and the items of a list."""
    if node.type == "inline_table":
        for child in node.named_children:
            if child.type == "pair":
                _add_pair(index, path, child)
    elif node.type == "array":
        items = [child for child in node.named_children if child.type != "comment"]
        for number, child in enumerate(items):
            index.lines[(*path, number)] = child.start_point[0] + 1
            _add_value(index, (*path, number), child)


def _keys(node: Node) -> Path:
    """Return the keys of a bare, quoted or dotted key."""
    raw = (node.text or b"").decode("utf-8", "replace")
    if not any(character in raw for character in "\"'. \t"):
        return (raw,)
    keys: list[str] = []
    try:
        data: object = tomllib.loads(f"{raw} = 0")
    except (ValueError, RecursionError):
        return (raw,)
    while isinstance(data, dict):
        key, data = next(iter(data.items()))
        keys.append(key)
    return tuple(keys)
