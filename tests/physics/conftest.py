"""Property tests of this room have no deadline: a busy machine is no defect of a formula."""

from __future__ import annotations

from hypothesis import settings

settings.register_profile("physics", deadline=None)
settings.load_profile("physics")
