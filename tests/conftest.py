"""What holds for all tests: property tests without a time limit, and the same draws in every gate run."""

from __future__ import annotations

import os

from hypothesis import settings

# The first call of a law may load a library on a busy machine: no deadline.
settings.register_profile("local", deadline=None)
settings.register_profile("ci", deadline=None, derandomize=True, print_blob=True)
settings.load_profile("ci" if os.environ.get("CI") else "local")
