"""The smallest store there is: one run is a picture too."""

import pytest
from closed_form_store import closed_form_store

from workbench.views.widgets.workbench import Workbench


@pytest.mark.parametrize("rows", [[0], [0, 48]])
def test_one_run_or_one_of_each_specimen_is_shown(rows: list[int]) -> None:
    store = closed_form_store(hostile=False)
    store.runs = store.runs.isel(run=rows)
    bench = Workbench(store)
    assert bench.failure.value == ""
    assert "text/html" in bench._repr_mimebundle_()
    bench.close()
