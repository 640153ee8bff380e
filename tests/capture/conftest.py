# ruff: noqa: E501 -- tables of cases are read by column
"""A small campaign that is free of findings, to be spoilt one thing at a time."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from workbench.capture.campaign import Campaign
from workbench.capture.read import read_campaign

SHEET = """\
sheet = 1
title = "Spring rings"
operator = "bench 1"

[columns]
time = "time"

[circuits.main.field]
sensor = "shunt"
resistance = "0.4975(5) ohm"
inductance = "12(5) nH"
scale = "1"
delay = "0(3) ns"

[circuits.main.induction]
sensor = "passive integrator"
resistance = "20.00(2) kohm"
capacitance = "1.000(5) uF"

[specimens.R1]
alloy = "Fe-3Si, melt 1"
condition = "850 degC 2 h"
outer_diameter = "40.02(2) mm"
inner_diameter = "34.01(2) mm"
height = "5.00(2) mm"
mass = "17.31(1) g"
density = "7480(15) kg/m^3"
resistivity = "82(1) uohm*cm"
thickness = "0.30(1) mm"
primary_turns = 120
secondary_turns = 60
coil_area = "24(1) mm^2"
material_class = "electrical steel"
heat_capacity = "460 J/(kg*K)"

[specimens.R1.factors]
anneal_temperature = "850 degC"
batch = 7

[specimens.E2]
alloy = "ferrite"
path_length = "113.1(1) mm"
area = "20.0(1) mm^2"
primary_turns = 12
secondary_turns = 6

[inductors.M1]
mutual_inductance = "10.00(1) uH"
[inductors.M2]

[limits]
few_samples = 50
"""
RUNS = """\
capture,specimen,circuit,kind,frequency [Hz],temperature [degC],peak_field [A/m],peak_induction [T],repeat,remark,measured_at,demagnetised
captures/a.csv,R1,main,loop,50,23,100,,1,"first, of all",2024-10-03T14:30:00,yes
captures/b.csv,R1,main,,50,23,100,,,,,
captures/c.csv,M1,main,air,50,23,,,,,,
captures/d.csv,E2,main,trace,50,23,,,,,,
"""


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A campaign folder without findings; its captures are not there yet."""
    place = tmp_path / "spring"
    (place / "captures").mkdir(parents=True)
    (place / "campaign.toml").write_text(SHEET, encoding="utf-8")
    (place / "runs.csv").write_text(RUNS, encoding="utf-8")
    return place


OneCapture = Callable[..., Campaign]


@pytest.fixture
def one_capture(folder: Path) -> OneCapture:
    """Makes a campaign of one run: its capture's text, more keys of [columns], kind, frequency."""

    def make(capture: str, columns: str = "", kind: str = "loop", frequency: str = "50", scale: str = "") -> Campaign:
        sheet = SHEET.replace('time = "time"', columns or 'time = "time"').replace(
            'scale = "1"', scale or 'scale = "1"'
        )
        (folder / "campaign.toml").write_text(sheet, encoding="utf-8")
        head = "capture,specimen,kind,frequency [Hz],temperature [degC],peak_field [A/m]\n"
        quoted = capture.replace('"', '""')
        (folder / "runs.csv").write_text(f'{head}"{quoted}",R1,{kind},{frequency},23,100\n', encoding="utf-8")
        return read_campaign(folder)

    return make


@pytest.fixture
def wave() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Time s and two channels V: 400 samples of two cycles of 50 Hz."""
    time = np.arange(400) * 1e-4
    return time, np.sin(2 * np.pi * 50 * time), 0.1 * np.cos(2 * np.pi * 50 * time)
