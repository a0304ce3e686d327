"""One setting for every property test: the same examples at each run, no clock. Campaigns look further."""

from __future__ import annotations

from hypothesis import settings

settings.register_profile("suite", deadline=None, derandomize=True, print_blob=True)
settings.load_profile("suite")
