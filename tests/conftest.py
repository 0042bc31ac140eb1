"""What every test shares: plain output, no display, the same hypothesis draws in every run."""

from __future__ import annotations

import os
from pathlib import Path

import hypothesis
import pytest

os.environ["MPLBACKEND"] = "Agg"
os.environ["NO_COLOR"] = "1"
os.environ.setdefault("JUPYTER_PLATFORM_DIRS", "1")

hypothesis.settings.register_profile("same", deadline=None, derandomize=True, database=None)
hypothesis.settings.register_profile("more", deadline=None, max_examples=2000)
hypothesis.settings.load_profile(os.environ.get("TAUTWISE_HYPOTHESIS", "same"))


@pytest.fixture(scope="session")
def root() -> Path:
    """The repository's top folder."""
    return Path(__file__).resolve().parents[1]
