"""A smaller, seeded form of the study in tests/benchmarks/coverage.py: the intervals hold the truth."""

import importlib.util
import sys
from pathlib import Path

import numpy as np
import pytest

_PATH = Path(__file__).parents[1] / "benchmarks" / "coverage.py"


@pytest.fixture(scope="module")
def held() -> dict[str, float]:
    spec = importlib.util.spec_from_file_location("coverage_study", _PATH)
    assert spec is not None
    assert spec.loader is not None
    study = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = study
    spec.loader.exec_module(study)
    deviations = np.concatenate([study.study(case, 12, 7) for case in study.cases()])
    return dict(zip(study.QUANTITIES, study.held(deviations), strict=True))


def test_the_95_per_cent_interval_holds_the_truth_in_about_95_of_100(held: dict[str, float]) -> None:
    """384 captures: 95 % is met within three binomial standard deviations, 3.3 %."""
    assert len(held) == 13
    for name, per_cent in held.items():
        assert per_cent == pytest.approx(95, abs=3.4), name
