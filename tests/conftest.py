"""Settings of the whole suite: hypothesis profiles, one place; and a cache folder that is not the user's."""

from __future__ import annotations

import atexit
import os
import shutil
import tempfile

from hypothesis import HealthCheck, settings

settings.register_profile(
    "quick", deadline=None, max_examples=50, suppress_health_check=[HealthCheck.too_slow]
)
settings.register_profile("ci", parent=settings.get_profile("quick"), max_examples=100, derandomize=True)
settings.register_profile("deep", parent=settings.get_profile("quick"), max_examples=2000)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "quick"))

os.environ["XDG_CACHE_HOME"] = tempfile.mkdtemp(prefix="revsynth-tests-")
atexit.register(shutil.rmtree, os.environ["XDG_CACHE_HOME"], ignore_errors=True)
