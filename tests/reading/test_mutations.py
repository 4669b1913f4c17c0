"""Any change of a faultless file either reads or brings the package's own error; nothing else, ever."""

from __future__ import annotations

import copy
import tomllib
from pathlib import Path
from typing import Any

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from layoutgen.errors import WrongInputError
from layoutgen.reading import inputs_from_data, read_inputs
from layoutgen.reading.faults import SHOWN

HERE = Path(__file__).parent
CIRCUIT = (HERE / "gauge.toml").read_bytes()
RULES = (HERE / "house.toml").read_bytes()
CIRCUIT_DATA = tomllib.loads(CIRCUIT.decode())
RULES_DATA = tomllib.loads(RULES.decode())

VALUES = st.one_of(
    st.none(),
    st.booleans(),
    st.integers(),
    st.floats(),
    st.text(max_size=12),
    st.sampled_from(
        ["gnd", "open", "free", "rf", "dc", "1 mm", "1 GHz", "50 ohm", "a", "C1", "Q1", "90 deg", "*", "left"]
    ),
    st.lists(st.sampled_from(["a", "gnd", "1 mm", "*", "left"]), max_size=5),
    st.dictionaries(st.sampled_from(["at", "size", "net", "gate", "x"]), st.just("1 mm"), max_size=3),
    st.dates(),
)


def accounted(function: Any, *arguments: Any, **keywords: Any) -> None:
    """Call a reader; a fault must be well formed, anything but the package's error goes through."""
    try:
        function(*arguments, **keywords)
    except WrongInputError as error:
        assert 0 < len(error.faults) <= SHOWN + 1
        for fault in error.faults:
            message = str(fault)
            assert message.isprintable()
            assert len(message) < 1500
        keys = [fault.key for fault in error.faults if fault.key and "a second time" not in fault.found]
        assert len(keys) == len(set(keys)), keys


def _places(node: Any, path: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    """Return the paths of all values of a file's data."""
    items = node.items() if isinstance(node, dict) else enumerate(node) if isinstance(node, list) else ()
    return [path] * bool(path) + [found for key, value in items for found in _places(value, (*path, key))]


def _parent(data: Any, path: tuple[Any, ...]) -> Any:
    """Return what holds the value at a path, None when it is no longer there."""
    for key in path[:-1]:
        try:
            data = data[key]
        except (KeyError, IndexError, TypeError):
            return None
    return data if isinstance(data, dict | list) else None


@st.composite
def changed(draw: st.DrawFn, data: dict[str, Any]) -> dict[str, Any]:
    """Draw a file's data with up to three values replaced, removed, or put under another key."""
    data = copy.deepcopy(data)
    for path in draw(st.lists(st.sampled_from(_places(data)), min_size=1, max_size=3)):
        holder, key = _parent(data, path), path[-1]
        action = draw(st.sampled_from(["replace", "remove", "rename", "take"]))
        present = (isinstance(holder, dict) and key in holder) or (
            isinstance(holder, list) and key in range(len(holder))
        )
        if not present:
            continue
        if action == "remove":
            del holder[key]
        elif action == "rename" and isinstance(holder, dict):
            holder[draw(st.text(max_size=8))] = holder.pop(key)
        elif action == "take":
            source = draw(st.sampled_from(_places(CIRCUIT_DATA)))
            holder[key] = copy.deepcopy(_parent(CIRCUIT_DATA, source)[source[-1]])
        else:
            holder[key] = draw(VALUES)
    return data


@settings(max_examples=300, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(changed(CIRCUIT_DATA))
def test_changed_circuit(data: dict[str, Any]) -> None:
    """Values of any type at any key of the circuit file."""
    accounted(inputs_from_data, data, rules=RULES_DATA, folder=HERE)


@settings(max_examples=200, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(changed(RULES_DATA))
def test_changed_rules(data: dict[str, Any]) -> None:
    """Values of any type at any key of the rule file."""
    accounted(inputs_from_data, CIRCUIT_DATA, rules=data, folder=HERE)


@st.composite
def mangled(draw: st.DrawFn, content: bytes) -> bytes:
    """Draw a file's bytes with a piece removed, doubled, moved or overwritten."""
    start = draw(st.integers(0, len(content)))
    stop = min(len(content), start + draw(st.integers(0, 60)))
    piece = draw(
        st.one_of(st.binary(max_size=8), st.just(content[start:stop] * 2), st.text(max_size=8).map(_encoded))
    )
    place = draw(st.one_of(st.just(start), st.integers(0, len(content))))
    rest = content[:start] + content[stop:]
    return rest[:place] + piece + rest[place:]


def _encoded(text: str) -> bytes:
    return text.encode("utf-8", "replace")


@settings(max_examples=300, deadline=None, suppress_health_check=list(HealthCheck))
@given(circuit=mangled(CIRCUIT), rules=st.one_of(st.just(RULES), mangled(RULES)))
def test_mangled_bytes(tmp_path_factory: Any, circuit: bytes, rules: bytes) -> None:
    """Bytes lost, doubled or strange, in both files."""
    folder = tmp_path_factory.getbasetemp()
    (folder / "gauge.toml").write_bytes(circuit)
    (folder / "house.toml").write_bytes(rules)
    accounted(read_inputs, folder / "gauge.toml")


@settings(max_examples=100, deadline=None, suppress_health_check=list(HealthCheck))
@given(
    content=st.one_of(
        st.binary(max_size=200), st.text(alphabet="[]{}=.,'\"#\n ab1", max_size=80).map(_encoded)
    )
)
def test_junk(tmp_path_factory: Any, content: bytes) -> None:
    """Files that were never meant to be circuits."""
    path = tmp_path_factory.getbasetemp() / "junk.toml"
    path.write_bytes(content)
    accounted(read_inputs, path)
