"""Hints loosened, to find the sizes that a pinned drawing has settled to.

Widths and lengths depend a little on the drawing: on the pour beside the lines, and on the response. Parts
pinned where an earlier drawing had them leave their lines just the room that the settled lengths take, which
those of a first draft do not. A circuit with its hints loosened settles to the same sizes, or nearly so.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace

from layoutgen.reading import CircuitFile, Hint, Port, Route

__all__ = ["loosened"]


def loosened(file: CircuitFile) -> Iterator[CircuitFile]:
    """Yield a circuit with less and less asked of places; nothing where no hint asks a place or a length.

    First without places, and with the longest leg of each line open, but with the other legs, with headings,
    turns and the order of the ports, on a board of any size; then with all legs open; then without hints on
    lines and parts, the ports where they were; then with neither.
    """
    hints = file.layout.hints
    if not any(hint.at or (hint.route and any(hint.route.lengths)) for hint in hints.values()):
        return
    longest = {name: _without_place(hint, _with_longest_open(hint.route)) for name, hint in hints.items()}
    turns = {name: _without_place(hint, _with_open_legs(hint.route)) for name, hint in hints.items()}
    anywhere = file.model_copy(update={"board": file.board.model_copy(update={"size": None})})
    free = anywhere.model_copy(update={"ports": _in_order(file.ports)})
    yield _with_hints(free, longest)
    if turns != longest:
        yield _with_hints(free, turns)
    yield _with_hints(anywhere, {})
    yield _with_hints(free, {})


def _with_hints(file: CircuitFile, hints: Mapping[str, Hint]) -> CircuitFile:
    return file.model_copy(update={"layout": file.layout.model_copy(update={"hints": hints})})


def _without_place(hint: Hint, route: Route | None) -> Hint:
    """Return a hint without its place, and with another route."""
    return hint.model_copy(update={"at": None, "route": route})


def _with_longest_open(route: Route | None) -> Route | None:
    """Return a route whose longest leg is open; as it is where any leg is."""
    if route is None or None in route.lengths:
        return route
    longest = max(range(len(route.lengths)), key=lambda k: route.lengths[k] or 0.0)
    legs = (None if k == longest else length for k, length in enumerate(route.lengths))
    return replace(route, lengths=tuple(legs))


def _with_open_legs(route: Route | None) -> Route | None:
    return None if route is None else replace(route, lengths=(None,) * len(route.lengths))


def _in_order(ports: Mapping[str, Port]) -> dict[str, Port]:
    """Return ports without places, those of each edge in the order in which they lay along it."""
    placed = [name for name, port in ports.items() if port.edge is not None and port.at is not None]
    along = sorted(placed, key=lambda name: ports[name].at or 0.0)
    by_edge = {edge: iter([n for n in along if ports[n].edge == edge]) for edge in _EDGES}
    order = [next(by_edge[ports[name].edge or ""]) if name in placed else name for name in ports]
    return {name: ports[name].model_copy(update={"at": None}) for name in order}


_EDGES = ("west", "south", "east", "north")
