"""The choice of runs for a hand-off."""

from __future__ import annotations

import pytest
import xarray as xr

from workbench.base.errors import HandoffError
from workbench.write.choice import Choice, chosen, settings_of


def test_everything_kept_is_the_default(runs: xr.Dataset) -> None:
    assert chosen(runs, Choice()).sizes["run"] == runs.sizes["run"] - 1
    assert str(Choice()) == "every setting of every specimen"


def test_names_and_settings_are_both_asked_for(runs: xr.Dataset) -> None:
    found = chosen(runs, Choice(specimen=["R1", "R2"], frequency=[400.0]))
    assert set(found.specimen.values) == {"R1", "R2"}
    assert set(found.frequency.values) == {400.0}
    assert found.sizes["run"] == 4
    assert str(Choice(specimen=["R1"], frequency=[400.0])) == "specimen R1; frequency 400 Hz"


def test_a_setting_is_found_although_its_last_digit_differs(runs: xr.Dataset) -> None:
    assert chosen(runs, Choice(frequency=[400.0 * (1 + 1e-15)])).sizes["run"] > 0


@pytest.mark.parametrize(
    ("choice", "words"),
    [
        (Choice(specimen=["R11"]), ["specimen", "R11", "Did you mean 'R1'?"]),
        (Choice(frequency=[50.5]), ["frequency", "50.5 Hz", "Did you mean '50 Hz'?"]),
        (Choice(peak_induction=[1.0]), ["peak_induction", "1 T", "There is none to choose from"]),
        (Choice(specimen=[]), ["found no kept run"]),
    ],
)
def test_what_no_run_has_is_said(runs: xr.Dataset, choice: Choice, words: list[str]) -> None:
    with pytest.raises(HandoffError) as error:
        chosen(runs, choice)
    for word in words:
        assert word in str(error.value)


def test_a_choice_of_only_set_aside_runs_is_no_choice(runs: xr.Dataset, hostile: str) -> None:
    with pytest.raises(HandoffError, match="found no kept run"):
        chosen(runs, Choice(specimen=[hostile], peak_field=[100.0], frequency=[400.0]))


def test_settings_from_text_are_in_the_unit_of_the_setting() -> None:
    assert settings_of("temperature", ["-40 degC", "-40", "1e2"]) == [-40.0, -40.0, 100.0]
    assert settings_of("peak_field", ["0.1 kA/m"]) == [100.0]


def test_every_wrong_setting_is_named() -> None:
    with pytest.raises(HandoffError, match=r"'400 hertzz'.*'nan Hz'"):
        settings_of("frequency", ["400 hertzz", "nan", "50"])
