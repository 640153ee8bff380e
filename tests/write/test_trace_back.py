"""One run's whole way, from the raw file on."""

import shutil
from pathlib import Path

import pytest

from workbench.base.errors import StoreError
from workbench.capture.read import read_campaign
from workbench.store.open import Store
from workbench.store.reduce import reduce
from workbench.write.trace_back import trace_back

SAMPLE = Path(__file__).parents[2] / "sample_runs" / "one_ring_bench"
CAPTURE = "captures/step-05.csv"


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> Store:
    folder = tmp_path_factory.mktemp("back") / "one ring"
    shutil.copytree(SAMPLE, folder)
    return reduce(read_campaign(folder), folder.with_suffix(".store"), progress=False)


def test_what_it_says_is_what_the_store_holds(store: Store) -> None:
    text = str(trace_back(store, CAPTURE))
    run = store.runs.isel(run=store.runs["capture"].values.tolist().index(CAPTURE))
    assert str(run["capture_sha256"].values) in text
    assert f"{float(run['specific_loss']):.3f}" in text.split("\n")[0]
    assert "largest share:" in text
    assert "the part between repeats is unknown" in text
    assert "more repeats will not help" in text
    shares = run["budget"].sel(quantity="specific_loss")
    largest = str(shares["source"].values[abs(shares.values).argmax()]).replace("_", " ")
    assert largest in text.split("\n")[0]


def test_the_corrections_add_up_to_the_figure(store: Store) -> None:
    """An RC integrator taken as ideal under-reads the loss: closed form in tests/references."""
    title, head, rows = trace_back(store, CAPTURE).tables[0]
    assert title.startswith("corrections")
    assert head[1].startswith("W")
    run = store.runs.isel(run=store.runs["capture"].values.tolist().index(CAPTURE))
    assert float(rows[-1][1]) == pytest.approx(float(run["loss_per_cycle"]), rel=1e-5)
    assert float(rows[0][1]) < float(rows[-1][1])


def test_html_shows_hostile_text_as_letters(store: Store) -> None:
    html = trace_back(store, CAPTURE)._repr_html_()
    assert "<table>" in html
    assert "<img" not in html


def test_refusals(store: Store) -> None:
    with pytest.raises(StoreError, match=r"Did you mean 'captures/step-05.csv'"):
        trace_back(store, "captures/step-5.csv")
    capture = store.campaign_folder / CAPTURE
    kept = capture.read_bytes()
    capture.write_bytes(kept + b"\n")
    with pytest.raises(StoreError, match="another content"):
        trace_back(store, CAPTURE)
    capture.write_bytes(kept)
    moved = store.campaign_folder.rename(store.campaign_folder.with_name("elsewhere"))
    with pytest.raises(StoreError, match="Put the folder back"):
        trace_back(store, CAPTURE)
    moved.rename(moved.with_name("one ring"))
