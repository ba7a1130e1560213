"""The peak memory of a process of its own, as Linux counts it."""

from __future__ import annotations

import subprocess
import sys

# VmHWM belongs to the process alone; ru_maxrss of a child starts with what its parent used.
_LAST = (
    "    import re, sys\n"
    "    from pathlib import Path\n"
    "    found = re.search(r'VmHWM:\\s+(\\d+) kB', Path('/proc/self/status').read_text())\n"
    "    print('peak', found[1], file=sys.stderr)\n"
)


def peak_memory(code: str, arguments: list[str]) -> float:
    """Return the peak memory [MB] of a process that runs the lines ``code``, which may exit with 0 or 1."""
    lines = "".join(f"    {line}\n" for line in code.splitlines())
    whole = f"try:\n{lines}finally:\n{_LAST}"
    done = subprocess.run(
        [sys.executable, "-c", whole, *arguments], capture_output=True, text=True, check=False
    )
    assert done.returncode in (0, 1) and "peak" in done.stderr, done.stderr
    return int(done.stderr.rsplit("peak", 1)[1]) / 1024
