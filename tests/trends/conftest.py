"""Make the campaign factory importable and give the default criteria."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from campaign.ledger.criteria import Criteria

sys.path.insert(0, str(Path(__file__).parent))


@pytest.fixture
def criteria() -> Criteria:
    return Criteria()


@pytest.fixture
def rng() -> np.random.Generator:
    return np.random.default_rng(20240607)
