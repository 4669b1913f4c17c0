"""`draw` with all files against the bare import of the libraries it uses, and the peak memory of both.

Run: python benchmarks/bench_draw.py [CIRCUIT]
"""

from __future__ import annotations

import json
import sys
import tempfile
from pathlib import Path

from timing import best, python, show

ROOT = Path(__file__).parents[1]
BARE = "import numpy, shapely, gdstk, ezdxf, scipy.optimize, matplotlib.pyplot, pydantic"
DRAW_LIMIT = 2.5


def main() -> int:
    """Print seconds, ratio, peak memory, the stages; the exit status says whether the limit is kept."""
    circuit = sys.argv[1] if len(sys.argv) > 1 else str(ROOT / "examples" / "telemetry_driver.toml")
    with tempfile.TemporaryDirectory() as folder:
        command = "from layoutgen.cli import main; main()"
        draw = python(command, "draw", circuit, "--out", f"{folder}/out", "-q")
        bare, draws = best([python(BARE), draw], rounds=5)
        seconds = json.loads(Path(folder, "out", "report.json").read_bytes())["seconds"]
    show("bare import", bare)
    kept = show("layoutgen draw", draws, bare, DRAW_LIMIT)
    for stage, spent in seconds.items():
        print(f"  {stage:<24} {spent:7.3f} s")
    return 0 if kept else 1


if __name__ == "__main__":
    sys.exit(main())
