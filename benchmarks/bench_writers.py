"""DXF, GDSII and Gerber of a board with 1e5 vias against the plainest loops that write the same shapes.

Each via is two circles, its land and its drill: polyline of two arcs and circle in DXF (R12: two circles),
references in GDSII, a flash in Gerber (drills are no part of that). The plain loops go through the same
shapes and vias once, with gdstk or with formatted text (ezdxf, told as well, is slower), and know nothing of
nets, findings or attributes. Each runs in a process of its own, in turns.

Run: python benchmarks/bench_writers.py [VIAS]
"""

from __future__ import annotations

import io
import os
import resource
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from functools import partial
from pathlib import Path

from bench_page import ROOT, with_vias
from timing import Spent

from layoutgen.artwork import LAYERS
from layoutgen.geometry import Point
from layoutgen.pipeline import run
from layoutgen.writers import Job, Result
from layoutgen.writers.dxf import write_dxf
from layoutgen.writers.dxf_r12 import write_dxf_r12
from layoutgen.writers.gds import write_gds
from layoutgen.writers.gerber import GERBER_WRITERS

ROUNDS = 5
JOB = Job(stem="board")


def outlines(result: Result) -> Iterator[tuple[str, tuple[Point, ...]]]:
    """Yield layer and vertices [nm], arcs as chords, of everything but lands and drills."""
    for shape in result.artwork.shapes:
        if shape.role != "land":
            yield from ((shape.layer, ring.chords()) for ring in (shape.outline, *shape.holes))


def lands(result: Result) -> Iterator[tuple[str, int, int, int]]:
    """Yield layer, middle and diameter [nm] of the lands, which are outlines of two half-circles."""
    for shape in result.artwork.shapes:
        if shape.role == "land":
            (x0, y), (x1, _) = shape.outline.points
            yield shape.layer, (x0 + x1) // 2, y, x1 - x0


def circles(result: Result) -> Iterator[tuple[str, int, int, int]]:
    """Yield layer, middle and diameter [nm] of lands and drills."""
    yield from lands(result)
    yield from (("drill_plated", via.x, via.y, via.drill) for via in result.artwork.vias)


def plain_dxf(result: Result, *, lands_as_circles: bool = False) -> bytes:
    """Write the entities as text."""
    texts = ["  0\nSECTION\n  2\nENTITIES\n"]
    for layer, points in outlines(result):
        texts.append(f"  0\nLWPOLYLINE\n  8\n{layer}\n 90\n{len(points)}\n 70\n1\n")
        for x, y in points:
            texts.append(f" 10\n{x / 1e6:.6f}\n 20\n{y / 1e6:.6f}\n")
    for layer, x, y, size in circles(result):
        if lands_as_circles or layer.startswith("drill"):
            place = f" 10\n{x / 1e6:.6f}\n 20\n{y / 1e6:.6f}\n"
            texts.append(f"  0\nCIRCLE\n  8\n{layer}\n{place} 40\n{size / 2e6:.6f}\n")
            continue
        texts.append(f"  0\nLWPOLYLINE\n  8\n{layer}\n 90\n2\n 70\n1\n")
        ends = (x - size // 2, x + size // 2)
        texts += [f" 10\n{end / 1e6:.6f}\n 20\n{y / 1e6:.6f}\n 42\n1.0\n" for end in ends]
    texts.append("  0\nENDSEC\n  0\nEOF\n")
    return "".join(texts).encode()


def plain_ezdxf(result: Result) -> bytes:
    """Write the entities with ezdxf, one call for each."""
    from ezdxf.filemanagement import new

    document = new("R2010", units=4)
    space = document.modelspace()
    for layer, points in outlines(result):
        corners = [(x / 1e6, y / 1e6) for x, y in points]
        space.add_lwpolyline(corners, close=True, dxfattribs={"layer": layer})
    for layer, x, y, size in circles(result):
        if layer.startswith("drill"):
            space.add_circle((x / 1e6, y / 1e6), size / 2e6, {"layer": layer})
            continue
        ends = [((x - size // 2) / 1e6, y / 1e6, 1.0), ((x + size // 2) / 1e6, y / 1e6, 1.0)]
        space.add_lwpolyline(ends, "xyb", close=True, dxfattribs={"layer": layer})
    stream = io.StringIO()
    document.write(stream)
    return stream.getvalue().encode()


def plain_gds(result: Result) -> bytes:
    """Write polygons (holes as polygons) and two references for each via with gdstk, one call for each."""
    import gdstk

    library = gdstk.Library(unit=1e-6, precision=1e-9)
    top = library.new_cell("top")
    for name, points in outlines(result):
        top.add(gdstk.Polygon([(x / 1e3, y / 1e3) for x, y in points], *LAYERS[name]))
    cells: dict[tuple[str, int], gdstk.Cell] = {}
    for layer, x, y, size in circles(result):
        cell = cells.get((layer, size))
        if cell is None:
            cell = cells[layer, size] = library.new_cell(f"{layer}_{size}")
            cell.add(gdstk.ellipse((0, 0), size / 2e3, tolerance=1, layer=LAYERS[layer][0]))
        top.add(gdstk.Reference(cell, (x / 1e3, y / 1e3)))
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder, "out.gds")
        library.write_gds(path)
        return path.read_bytes()


def plain_gerber(result: Result) -> bytes:
    """Write a flash for each land and a region of straight edges for each other outline, layer by layer."""
    files: dict[str, list[str]] = {}
    for layer, points in outlines(result):
        (x, y), *others = points
        edges = "".join([f"X{px}Y{py}D01*\n" for px, py in (*others, (x, y))])
        files.setdefault(layer, []).append(f"G36*\nX{x}Y{y}D02*\n{edges}G37*\n")
    codes: dict[int, int] = {}
    for layer, x, y, size in lands(result):
        code = codes.setdefault(size, 10 + len(codes))
        files[layer].append(f"D{code}*\nX{x}Y{y}D03*\n")
    tools = "".join(f"%ADD{code}C,{size / 1e6:.6f}*%\n" for size, code in codes.items())
    heads = f"%FSLAX46Y46*%\n%MOMM*%\n{tools}G01*\n"
    return "".join(f"{heads}{''.join(body)}M02*\n" for body in files.values()).encode()


def own_gerber(result: Result) -> bytes:
    """Write all layers."""
    return b"".join(write(result, JOB) for write in GERBER_WRITERS.values())


PAIRS: dict[str, tuple[Callable[[Result], bytes], Callable[[Result], bytes], float]] = {
    "DXF, ezdxf": (plain_ezdxf, lambda result: write_dxf(result, JOB), 2.5),
    "DXF R2010": (plain_dxf, lambda result: write_dxf(result, JOB), 2.5),
    "DXF R12": (partial(plain_dxf, lands_as_circles=True), lambda result: write_dxf_r12(result, JOB), 2.5),
    "GDSII": (plain_gds, lambda result: write_gds(result, JOB), 2.0),
    "Gerber": (plain_gerber, own_gerber, 3.0),
}
"""Plain loop, writer, and how many times as long the writer may take [-]."""


def alone(write: Callable[[Result], bytes], result: Result) -> tuple[Spent, int]:
    """Run a writer in a process of its own; return time, memory beyond the result's own, size of the file."""
    reading, writing = os.pipe()
    child = os.fork()
    if child == 0:
        for shape in result.artwork.shapes:  # copies the pages that both processes share, before the clock
            _ = shape.outline.points, shape.outline.bulges
        before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
        start = time.process_time()
        data = write(result)
        seconds = time.process_time() - start
        grown = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before
        os.write(writing, f"{seconds} {grown / 1024} {len(data)}".encode())
        os._exit(0)
    os.close(writing)
    with os.fdopen(reading) as stream:
        told = stream.read().split()
    os.waitpid(child, 0)
    return Spent(float(told[0]), float(told[1])), int(told[2])


def compare(name: str, result: Result) -> bool:
    """Print seconds, memory and the ratio of a pair; return whether the limit is kept."""
    plain, own, limit = PAIRS[name]
    runs = [[alone(write, result) for write in (plain, own)] for _ in range(ROUNDS)]
    seconds = [min(turn[k][0].seconds for turn in runs) for k in (0, 1)]
    for k, who in enumerate(("plain loop", "layoutgen")):
        spent, size = runs[0][k]
        print(f"{name:<10} {who:<11} {seconds[k]:6.3f} s {spent.mebibytes:5.0f} MiB {size / 1e6:5.1f} MB")
    ratio = seconds[1] / seconds[0]
    print(f"{'':<10} {ratio:.2f} times, limit {limit:.1f}: {'kept' if ratio <= limit else 'MISSED'}")
    return ratio <= limit


def main() -> int:
    """Print the comparisons; the exit status says whether all limits are kept."""
    import ezdxf  # noqa: F401  (before the clock starts, for both sides)
    import gdstk  # noqa: F401

    count = int(sys.argv[1]) if len(sys.argv) > 1 else 100_000
    result = with_vias(run(ROOT / "examples" / "telemetry_driver.toml"), count)
    print(f"{count} vias with lands: processor time (best of {ROUNDS}), memory beyond the result's own, size")
    kept = [compare(name, result) for name in PAIRS]
    return 0 if all(kept) else 1


if __name__ == "__main__":
    sys.exit(main())
