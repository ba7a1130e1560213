"""Property tests without a time limit: the first call of a law may load a library on a busy machine."""

from __future__ import annotations

from hypothesis import settings

settings.register_profile("no deadline", deadline=None)
settings.load_profile("no deadline")
