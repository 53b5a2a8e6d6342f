"""What every test runs under: kernels kept in one folder of the suite's own, no window, the same examples every time."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from hypothesis import HealthCheck, settings

# Kept between runs: compiling takes longer than most tests. The folder inside is named by the hash of the kernel sources.
os.environ["HAIRPIN_CACHE"] = str(Path(tempfile.gettempdir()) / f"hairpin-tests-{os.getuid() if hasattr(os, 'getuid') else 'user'}")
os.environ["MPLBACKEND"] = "Agg"

settings.register_profile("steady", derandomize=True, deadline=None, suppress_health_check=[HealthCheck.too_slow])
settings.load_profile("steady")
