"""Start-up: `--help` and `size` against the bare import of numpy, pydantic and click, in the same run.

Run: python benchmarks/bench_startup.py [CIRCUIT]
"""

from __future__ import annotations

import sys
from pathlib import Path

from timing import best, python, show

ROOT = Path(__file__).parents[1]
BARE = "import numpy, pydantic, click"
HELP_LIMIT, SIZE_LIMIT = 2.0, 3.0


def main() -> int:
    """Print seconds and ratios; the exit status says whether the limits are kept."""
    circuit = sys.argv[1] if len(sys.argv) > 1 else str(ROOT / "examples" / "telemetry_driver.toml")
    command = "from layoutgen.cli import main; main()"
    bare, helps, sizes = best(
        [python(BARE), python(command, "--help"), python(command, "size", circuit)], rounds=9
    )
    show("bare import", bare)
    kept = show("layoutgen --help", helps, bare, HELP_LIMIT)
    kept &= show("layoutgen size", sizes, bare, SIZE_LIMIT)
    return 0 if kept else 1


if __name__ == "__main__":
    sys.exit(main())
