"""The small projects of the reader's tests serve here too."""

from __future__ import annotations

import sys
from pathlib import Path

sys.path.append(str(Path(__file__).parents[1] / "project"))
