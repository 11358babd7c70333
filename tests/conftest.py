"""Settings for all tests."""

from __future__ import annotations

import os

from hypothesis import settings

# The same examples on every run, so that a change fails for what it changed; look further with
# HYDROYIELD_EXPLORE=1.
settings.register_profile("same", derandomize=True, deadline=None)
settings.register_profile("explore", deadline=None)
settings.load_profile("explore" if os.environ.get("HYDROYIELD_EXPLORE") else "same")
