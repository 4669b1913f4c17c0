"""Which foreign layer is which of ours: the layers file, or our own names and numbers."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

from layoutgen.artwork import LAYERS
from layoutgen.errors import WrongInputError
from layoutgen.foreign.records import LayerKey
from layoutgen.origin import Fault
from layoutgen.reading.source import SourceMap, load

__all__ = ["LayerMap", "default_map", "read_layers", "shown"]

LayerMap = Mapping[str, tuple[LayerKey, ...]]
"""Our layer -> the foreign layers that together are it."""

_KEYS = ("format", "layers")
_VALUE = "a layer's name, [layer, datatype], or a list of these"
_LARGEST = 65_535


def default_map(numbered: bool) -> LayerMap:
    """Return our own names, or our own GDS numbers when ``numbered``."""
    return {name: (numbers if numbered else name,) for name, numbers in LAYERS.items()}


def shown(key: LayerKey) -> str:
    """Return a foreign layer as text for people, at most 40 characters of it."""
    if isinstance(key, tuple):
        return f"{key[0]}/{key[1]}"
    clean = "".join(c if c.isprintable() else "?" for c in key)
    return clean if len(clean) <= 40 else clean[:37] + "..."


def read_layers(path: str | Path) -> LayerMap:
    """Read a layers file: TOML, ``format = 1`` and a table ``[layers]`` from our names to foreign layers.

    Raises:
        WrongInputError: every fault of the file.
    """
    loaded = load(Path(path))
    faults = list(loaded.faults)
    data = loaded.data or {}
    if loaded.data is not None:
        faults += _head_faults(loaded.source, data)
    found: dict[str, tuple[LayerKey, ...]] = {}
    for name, value in _table(data).items():
        keys = _keys(value)
        fault = _layer_fault(loaded.source, name, value, keys)
        if fault is not None:
            faults.append(fault)
        elif keys is not None:
            found[name] = keys
    faults += [] if faults else _repeats(loaded.source, found)
    if faults:
        raise WrongInputError(faults)
    return found


def _table(data: Mapping[str, Any]) -> Mapping[str, Any]:
    """Return the table of layers, empty when there is none."""
    table = data.get("layers")
    return table if isinstance(table, dict) else {}


def _head_faults(source: SourceMap, data: Mapping[str, Any]) -> Iterable[Fault]:
    """Yield what is wrong at the top level."""
    version = data.get("format")
    if type(version) is not int or version != 1:
        yield Fault(source.location("format"), "format", "another version or none", "format = 1")
    for key in data:
        if key not in _KEYS:
            yield Fault(source.location((key,)), shown(key), "an unknown key", "format, [layers]")
    if not _table(data):
        yield Fault(
            source.location("layers"), "layers", "no layers", "a table [layers]: name = foreign layer"
        )


def _layer_fault(source: SourceMap, name: str, value: Any, keys: tuple[LayerKey, ...] | None) -> Fault | None:
    """Return what is wrong with one row, None when nothing."""
    place, path = source.location(("layers", name)), f"layers.{shown(name)}"
    if name not in LAYERS:
        near = difflib.get_close_matches(name, LAYERS, n=1)
        return Fault(place, path, "an unknown layer", near[0] if near else ", ".join(LAYERS))
    return Fault(place, path, f"a {type(value).__name__}", _VALUE) if keys is None else None


def _keys(value: Any) -> tuple[LayerKey, ...] | None:
    """Return the foreign layers a value names, None when it is of another form."""
    one = _key(value)
    if one is not None:
        return (one,)
    if isinstance(value, list) and value:
        keys = [_key(item) for item in value]
        named = [key for key in keys if key is not None]
        return tuple(named) if len(named) == len(keys) else None
    return None


def _key(value: Any) -> LayerKey | None:
    """Return one foreign layer, None when the value is of another form."""
    if isinstance(value, str) and value:
        return value
    numbers = isinstance(value, list) and len(value) == 2 and all(type(n) is int for n in value)
    if numbers and all(0 <= n <= _LARGEST for n in value):
        return value[0], value[1]
    return None


def _repeats(source: SourceMap, found: LayerMap) -> Iterable[Fault]:
    """Yield a fault for each foreign layer that is given to two of ours."""
    owner: dict[LayerKey, str] = {}
    for name, keys in found.items():
        for key in keys:
            plain = key.casefold() if isinstance(key, str) else key
            if owner.setdefault(plain, name) != name:
                text = f"{shown(key)}, which is {owner[plain]} already"
                yield Fault(source.location(("layers", name)), f"layers.{name}", text, "each layer once")
