"""What every test runs under: kernels kept in one folder of the suite's own, no window, the same examples every time."""

from __future__ import annotations

import os
from pathlib import Path

from hypothesis import HealthCheck, settings

# Kept between runs, because compiling takes longer than most tests, and in the checkout, where nobody else can write.
# The folder inside is named by the hash of the kernel sources, so an edit compiles afresh.
os.environ["HAIRPIN_CACHE"] = str(Path(__file__).parents[1] / ".pytest_cache" / "kernels")
os.environ["MPLBACKEND"] = "Agg"

settings.register_profile("steady", derandomize=True, deadline=None, database=None, suppress_health_check=[HealthCheck.too_slow])
settings.load_profile("steady")
