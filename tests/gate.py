"""The whole gate, one command: style, types, tests and doctests.

Sweeps marked slow are left out; each has an unmarked sample. `python -m pytest -m slow` runs them.
"""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

STEPS = (
    ("ruff", "check", "."),
    ("ruff", "format", "--check", "."),
    ("mypy",),
    ("pytest", "-m", "not slow"),
)


def main() -> int:
    root = Path(__file__).parents[1]
    for step in STEPS:
        print("·", " ".join(step), flush=True)
        code = subprocess.run([sys.executable, "-m", *step], cwd=root, check=False).returncode
        if code:
            return code
    return 0


if __name__ == "__main__":
    sys.exit(main())
