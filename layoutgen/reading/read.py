"""The readers: a path in, checked records out, or all faults at once."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeGuard, TypeVar

from layoutgen.reading.checks import check_circuit
from layoutgen.reading.circuit_records import CircuitFile
from layoutgen.reading.draft import Draft, given
from layoutgen.reading.faults import Faults, raise_faults
from layoutgen.reading.rule_checks import check_rule_names, check_rules
from layoutgen.reading.rule_records import RuleFile
from layoutgen.reading.source import LEVELS, Loaded, SourceMap, load, too_deep
from layoutgen.reading.validate import table_keys, validate
from layoutgen.reading.wording import a_or_b, describe, nearest, quote

__all__ = [
    "Inputs",
    "circuit_from_data",
    "inputs_from_data",
    "read_circuit",
    "read_inputs",
    "read_rules",
    "rules_from_data",
    "shipped_rules",
]

T = TypeVar("T")

_CIRCUIT_KEYS = table_keys(CircuitFile)
_RULE_KEYS = table_keys(RuleFile)


@dataclass(frozen=True)
class Inputs:
    """Both files of a run.

    Args:
        circuit: What was designed.
        rules: What the board house can make.
    """

    circuit: CircuitFile
    rules: RuleFile


def read_circuit(path: str | Path) -> CircuitFile:
    """Read a circuit file; its rule file is not opened.

    Raises:
        WrongInputError: every fault of the file.
    """
    loaded = load(Path(path))
    faults = _faults(loaded, _CIRCUIT_KEYS)
    circuit = _circuit(loaded.data, faults, Path(path).parent)
    return _result(circuit, [faults])


def read_rules(rules: str | Path, folder: str | Path | None = None) -> RuleFile:
    """Read a rule file.

    Args:
        rules: Name of a shipped rule file, or a path ending in ``.toml``.
        folder: What a relative path starts from; the current folder when None.

    Raises:
        WrongInputError: every fault of the file, or no such file.
    """
    name = str(rules)
    path = _rules_path(name, Path() if folder is None else Path(folder))
    if path is None:
        faults = Faults(SourceMap(name))
        faults.add((), *_unknown_rules(name))
        return _result(None, [faults])
    loaded = load(path)
    faults = _faults(loaded, _RULE_KEYS, foreign=True)
    record = _rules(loaded.data, faults)
    return _result(record, [faults])


def read_inputs(path: str | Path) -> Inputs:
    """Read a circuit file and the rule file that it names.

    Raises:
        WrongInputError: every fault of both files.
    """
    loaded = load(Path(path))
    faults = _faults(loaded, _CIRCUIT_KEYS)
    return _inputs(loaded.data, faults, Path(path).parent)


def circuit_from_data(
    data: Mapping[str, Any],
    *,
    rules: str | None = None,
    folder: str | Path | None = None,
    name: str = "circuit",
) -> CircuitFile:
    """Check a circuit built in code: tables as dicts, values as written in a circuit file.

    Args:
        data: The same structure as the file, quantities as text; None stands for a key left out.
        rules: Stands for ``board.rules`` where the data leave it out.
        folder: What the paths of data files start from; the current folder when None.
        name: Stands for the file's name in messages.

    Raises:
        WrongInputError: every fault, with its key path.
    """
    faults = Faults(SourceMap(name), _CIRCUIT_KEYS)
    circuit = _circuit(_with_rules(data, rules), faults, Path() if folder is None else Path(folder))
    return _result(circuit, [faults])


def inputs_from_data(
    data: Mapping[str, Any],
    *,
    rules: RuleFile | Mapping[str, Any] | str | None = None,
    folder: str | Path | None = None,
    name: str = "circuit",
) -> Inputs:
    """Check a circuit built in code together with its rules.

    Args:
        data: As for :func:`circuit_from_data`.
        rules: A record, the data of a rule file, a shipped name or a path; None: as ``board.rules`` says.
        folder: What relative paths start from; the current folder when None.
        name: Stands for the file's name in messages.

    Raises:
        WrongInputError: every fault of both.
    """
    place = Path() if folder is None else Path(folder)
    if rules is None or isinstance(rules, str):
        return _inputs(_with_rules(data, rules), Faults(SourceMap(name), _CIRCUIT_KEYS), place)
    record = rules if isinstance(rules, RuleFile) else rules_from_data(rules)
    circuit = circuit_from_data(data, rules=_PLACEHOLDER, folder=place, name=name)
    return Inputs(circuit, record)


def rules_from_data(data: Mapping[str, Any], *, name: str = "rules") -> RuleFile:
    """Check rules built in code: the same structure as a rule file, quantities as text.

    Raises:
        WrongInputError: every fault, with its key path.
    """
    faults = Faults(SourceMap(name), _RULE_KEYS)
    record = _rules(data, faults)
    return _result(record, [faults])


_PLACEHOLDER = "in-code"


def _result(result: T | None, collections: list[Faults]) -> T:
    """Return a reader's result, or raise the faults that stand against it."""
    raise_faults(collections)
    if result is None:
        raise AssertionError("nothing was read, yet no fault was found")
    return result


def _with_rules(data: Mapping[str, Any], rules: str | None) -> Mapping[str, Any]:
    """Return circuit data whose ``board.rules`` is filled in where it is left out."""
    board = given(data, "board")
    if rules is None or not isinstance(board, Mapping) or board.get("rules") is not None:
        return data
    return {**data, "board": {**board, "rules": rules}}


def _faults(loaded: Loaded, known: frozenset[str], foreign: bool = False) -> Faults:
    """Return the collection of a file's faults, with those of its text."""
    return Faults(loaded.source, known, foreign, loaded.complete, list(loaded.faults))


def _inputs(data: Mapping[str, Any] | None, faults: Faults, folder: Path) -> Inputs:
    """Return both records, or raise the faults of both files."""
    circuit = _circuit(data, faults, folder)
    name = given(data, "board", "rules")
    collections, rules = [faults], None
    if isinstance(name, str) and not faults.about(("board", "rules")) and not faults.about(("format",)):
        rules = _named_rules(name, faults, folder, collections)
    return _result(None if circuit is None or rules is None else Inputs(circuit, rules), collections)


def _named_rules(name: str, faults: Faults, folder: Path, collections: list[Faults]) -> RuleFile | None:
    """Return the rule file that a circuit names; a missing one is a fault of the circuit file."""
    path = _rules_path(name, folder)
    if path is None:
        faults.add(("board", "rules"), *_unknown_rules(name))
        return None
    loaded = load(path)
    if loaded.source.text is None:
        fault = loaded.faults[0]
        allowed = f"{fault.allowed}; the path starts at the circuit file"
        faults.add(("board", "rules"), f"{quote(name)}, {fault.found}", allowed)
        return None
    collections.append(_faults(loaded, _RULE_KEYS, foreign=True))
    return _rules(loaded.data, collections[-1])


def _circuit(data: Mapping[str, Any] | None, faults: Faults, folder: Path) -> CircuitFile | None:
    """Return the circuit's record after all checks, None when there are faults."""
    if not _is_readable(data, faults):
        return None
    data = _without_none(data)
    record = validate(CircuitFile, data, faults)
    check_circuit(Draft(data, faults), folder)
    if record is None or faults.items:
        return None
    record._source = faults.source
    return record


def _rules(data: Mapping[str, Any] | None, faults: Faults) -> RuleFile | None:
    """Return the rules' record after all checks, None when there are faults."""
    if not _is_readable(data, faults):
        return None
    data = _without_none(data)
    check_rule_names(data, faults)
    record = validate(RuleFile, data, faults)
    check_rules(data, faults)
    if record is None or faults.items:
        return None
    record._source = faults.source
    return record


def _without_none(data: Mapping[str, Any]) -> dict[str, Any]:
    """Return data whose keys with None, which only code can write, are left out, at any depth."""
    return {
        key: _without_none(value) if isinstance(value, Mapping) else value
        for key, value in data.items()
        if value is not None
    }


def _is_readable(data: Mapping[str, Any] | None, faults: Faults) -> TypeGuard[Mapping[str, Any]]:
    """Tell whether the data are of the form read here; if not, that is the only fault worth telling."""
    if data is None and faults.items:
        return False
    if not isinstance(data, Mapping) or too_deep(data):
        faults.add((), "data nested too deep" if isinstance(data, Mapping) else describe(data), LEVELS)
        return False
    value = data.get("format", 1)
    if isinstance(value, int) and not isinstance(value, bool) and value == 1:
        return True
    faults.items.clear()
    faults.add(("format",), describe(value), "the whole number 1")
    return False


def shipped_rules() -> dict[str, Path]:
    """Return name -> path of the rule files that come with the tool, by name."""
    package = Path(__file__).parent.parent
    installed = package / "_rules"
    folder = installed if installed.is_dir() else package.parent / "rules"
    return {path.stem: path for path in sorted(folder.glob("*.toml"))}


def _rules_path(name: str, folder: Path) -> Path | None:
    """Return the path of a rule file, None for a name that none is shipped under."""
    return folder / name if name.endswith(".toml") else shipped_rules().get(name)


def _unknown_rules(name: str) -> tuple[str, str]:
    """Return what was found and what is allowed where a rule file's name is not known."""
    known = list(shipped_rules())
    guess = nearest(name, known)
    hint = f' (the nearest is "{guess}")' if guess else ""
    return (
        f"{quote(name)}, no shipped rule file",
        f'{a_or_b(known)}{hint}, or a relative path ending in ".toml"',
    )
