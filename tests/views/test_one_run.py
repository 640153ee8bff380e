"""The smallest store there is: one run is a picture too."""

from dataclasses import replace
from pathlib import Path

import workbench
from workbench.views.widgets.workbench import Workbench

SAMPLE = Path(__file__).parents[2] / "sample_runs" / "one_ring_bench"


def test_a_store_of_one_run_is_shown(tmp_path: Path) -> None:
    campaign = workbench.read_campaign(SAMPLE)
    store = workbench.reduce(replace(campaign, runs=campaign.runs[:1]), tmp_path / "one.store", progress=False)
    bench = Workbench(store)
    assert bench.failure.value == ""
    assert "text/html" in bench._repr_mimebundle_()
    bench.close()
