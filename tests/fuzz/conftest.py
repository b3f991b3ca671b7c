"""The watch over time and memory needs a system with signals and limits as POSIX has them."""

from __future__ import annotations

import sys

collect_ignore_glob = ["test_*.py"] if sys.platform == "win32" else []
