"""Closeness of small numbers: pytest.approx lets anything below 1e-12 pass, and capacitance is 1e-10 F/m."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest


def near(value: Any, rel: float) -> Any:
    """What is within `rel` times the greatest entry of `value`, entry by entry."""
    return pytest.approx(value, rel=0.0, abs=rel * float(np.max(np.abs(value))))
