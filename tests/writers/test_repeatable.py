"""Equal results give equal bytes, whatever the process."""

from __future__ import annotations

import os
import pickle
import subprocess
import sys
from pathlib import Path

from layoutgen.writers import Job, Result, encode

ENCODES = """
import hashlib, pickle, sys
from layoutgen.writers import Job, encode
result = pickle.load(open(sys.argv[1], "rb"))
for name, data in encode(result, Job(stem="board", repeatable=True)).items():
    print(name, hashlib.sha256(data).hexdigest())
"""


def test_no_file_depends_on_the_hash_seed(handmade: Result, tmp_path: Path) -> None:
    """An order taken from a set, our own or a library's, differs between processes and rarely within one."""
    (tmp_path / "result").write_bytes(pickle.dumps(handmade))
    command = [sys.executable, "-c", ENCODES, str(tmp_path / "result")]
    outputs = {
        subprocess.run(
            command,
            check=True,
            capture_output=True,
            text=True,
            env={**os.environ, "PYTHONHASHSEED": str(seed)},
        ).stdout
        for seed in range(5)
    }
    assert len(outputs) == 1
    assert len(outputs.pop().splitlines()) == len(encode(handmade, Job(stem="board")))
