"""Running the checker of the CF conventions on a file."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path


def findings_of_strict_cf_check(*paths: Path) -> str:
    """'' if the checker has nothing to say about the files, else all it says."""
    checker = Path(sys.executable).parent / "compliance-checker"
    command = [str(checker), "-t", "cf:1.11", "-c", "strict", *map(str, paths)]
    done = subprocess.run(command, capture_output=True, text=True, check=False, timeout=300)
    return "" if done.returncode == 0 else done.stdout + done.stderr
