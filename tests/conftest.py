"""What all tests share: how properties are searched, and golden texts that one flag rewrites."""

from __future__ import annotations

import os
import signal
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import settings

settings.register_profile("house", deadline=None)
settings.register_profile("ci", deadline=None, derandomize=True)
settings.load_profile("ci" if os.environ.get("CI") else "house")

# A shell that starts the tests in the background has interrupts ignored, by every process that they start, too.
if signal.getsignal(signal.SIGINT) is signal.SIG_IGN:
    signal.signal(signal.SIGINT, signal.default_int_handler)

REWRITE = "--rewrite-golden"


def pytest_addoption(parser: pytest.Parser) -> None:
    parser.addoption(REWRITE, action="store_true", help="write what the tests see into the golden files")


@pytest.fixture
def checkout() -> Path:
    """The folder that holds ``seqcheck/``, ``grammar/`` and ``tests/``."""
    return Path(__file__).resolve().parent.parent


@pytest.fixture
def golden(request: pytest.FixtureRequest) -> Callable[[str, str], None]:
    """``golden(name, text)``: the text is that of the file ``golden/name`` beside the test, byte for byte."""

    def compare(name: str, text: str) -> None:
        file = request.path.parent / "golden" / name
        if request.config.getoption(REWRITE):
            file.parent.mkdir(exist_ok=True)
            file.write_bytes(text.encode("utf-8"))
        assert file.read_bytes().decode("utf-8") == text

    return compare
