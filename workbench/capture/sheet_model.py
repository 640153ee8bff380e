"""The shape of campaign.toml: which keys there are, and what each may hold."""

from __future__ import annotations

import math
from functools import partial
from typing import Annotated, Any, Literal

from pydantic import BaseModel, BeforeValidator, ConfigDict, Field

from workbench.base.errors import QuantityError
from workbench.base.measured import Measured, parse_quantity
from workbench.capture.findings import filled_text, one_of, quantity, refuse, shown, text, whole_number

SHEET_FORMAT = 1


def _check(*arguments: Any, **keywords: Any) -> BeforeValidator:
    return BeforeValidator(partial(quantity, **dict(zip(("si_unit", "example"), arguments, strict=True)), **keywords))


Text = Annotated[str, BeforeValidator(text)]
Named = Annotated[str, BeforeValidator(filled_text)]
Turns = Annotated[int, BeforeValidator(whole_number)]
Length = Annotated[Measured, _check("m", "40.02(2) mm")]
Area = Annotated[Measured, _check("m^2", "20.0(1) mm^2")]
Mass = Annotated[Measured, _check("kg", "17.31(1) g")]
Density = Annotated[Measured, _check("kg/m^3", "7480(15) kg/m^3")]
Resistivity = Annotated[Measured, _check("ohm*m", "82(1) uohm*cm")]
HeatCapacity = Annotated[Measured, _check("J/(kg*K)", "460 J/(kg*K)")]
Resistance = Annotated[Measured, _check("ohm", "0.4975(5) ohm")]
CoilResistance = Annotated[Measured, _check("ohm", "1.2(1) ohm", above=False)]
Inductance = Annotated[Measured, _check("H", "12(5) nH", above=False)]
MutualInductance = Annotated[Measured, _check("H", "10.00(1) uH")]
Capacitance = Annotated[Measured, _check("F", "10.0(1) uF")]
Sensitivity = Annotated[Measured, _check("V/A", "0.1 V/A")]
TimeConstant = Annotated[Measured, _check("s", "10.00(2) ms")]
Droop = Annotated[Measured, _check("Hz", "0.05 Hz", above=False)]
Delay = Annotated[Measured, _check("s", "0(3) ns", low=-math.inf)]
Rate = Annotated[Measured, _check("Hz", "200 kHz")]


class Scale(BaseModel):
    """A channel's scale: SI value, and the units it takes and gives ("" for a plain factor)."""

    value: Measured = Measured(1.0)
    takes: str = ""
    gives: str = ""


_SCALE_GIVES = {"field": ("V", "A", "A/m"), "induction": ("V", "Wb", "T")}


def _scale(value: Any, role: str) -> Scale:
    wanted = "a plain number, or a number of volts a division or volt, e.g. 0.5 V/div"
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        value = repr(value)
    if not isinstance(value, str):
        raise refuse(wanted, shown(value))
    scale = None
    for takes, gives in (("", ""), *((t, g) for t in ("div", "V") for g in _SCALE_GIVES[role])):
        try:
            parsed = parse_quantity(value, f"({gives})/({takes})" if takes else "")
            scale = Scale(value=parsed, takes=takes, gives=gives)
        except QuantityError:
            continue
        break
    if scale is None:
        raise refuse(wanted, shown(value) if value.strip() else "an empty text")
    if not math.isfinite(scale.value.value) or scale.value.value == 0:
        raise refuse(wanted, shown(value), "It may be neither zero nor infinite.")
    return scale


FieldScale = Annotated[Scale, BeforeValidator(partial(_scale, role="field"))]
InductionScale = Annotated[Scale, BeforeValidator(partial(_scale, role="induction"))]


class _Table(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True)


class Shunt(_Table):
    """A shunt in the primary, with its series inductance."""

    sensor: Literal["shunt"]
    resistance: Resistance
    inductance: Inductance | None = None
    scale: FieldScale = Scale()
    delay: Delay = Measured(0.0)


class CurrentProbe(_Table):
    """A probe with a voltage that follows the primary current."""

    sensor: Literal["current probe"]
    sensitivity: Sensitivity
    scale: FieldScale = Scale()
    delay: Delay = Measured(0.0)


class Winding(_Table):
    """The secondary's voltage itself."""

    sensor: Literal["winding"]
    load: Resistance | None = None
    coil_resistance: CoilResistance | None = None
    scale: InductionScale = Scale()
    delay: Delay = Measured(0.0)


class PassiveIntegrator(_Table):
    """Resistance and capacitor; the record is the capacitor's voltage."""

    sensor: Literal["passive integrator"]
    resistance: Resistance
    capacitance: Capacitance
    load: Resistance | None = None
    scale: InductionScale = Scale()
    delay: Delay = Measured(0.0)


class ElectronicIntegrator(_Table):
    """An integrating amplifier with its low corner."""

    sensor: Literal["electronic integrator"]
    time_constant: TimeConstant
    droop: Droop | None = None
    scale: InductionScale = Scale()
    delay: Delay = Measured(0.0)


class CircuitTable(_Table):
    """One circuit: two channels."""

    field: Annotated[Shunt | CurrentProbe, Field(discriminator="sensor")]
    induction: Annotated[Winding | PassiveIntegrator | ElectronicIntegrator, Field(discriminator="sensor")]


SENSORS: dict[str, dict[str, type[BaseModel]]] = {
    "field": {"shunt": Shunt, "current probe": CurrentProbe},
    "induction": {
        "winding": Winding,
        "passive integrator": PassiveIntegrator,
        "electronic integrator": ElectronicIntegrator,
    },
}


def _factor(value: Any) -> str:
    if isinstance(value, (dict, list)):
        raise refuse("a quantity or a text", shown(value))
    return value if isinstance(value, str) else str(value)


MATERIAL_CLASSES = ("electrical steel", "ferrite", "other")


class SpecimenTable(_Table):
    """One specimen.  Which dimensions go together is checked apart."""

    alloy: Named
    condition: Text = ""
    primary_turns: Turns
    secondary_turns: Turns
    outer_diameter: Length | None = None
    inner_diameter: Length | None = None
    height: Length | None = None
    path_length: Length | None = None
    area: Area | None = None
    mass: Mass | None = None
    density: Density | None = None
    resistivity: Resistivity | None = None
    thickness: Length | None = None
    coil_area: Area | None = None
    heat_capacity: HeatCapacity | None = None
    material_class: Annotated[str, BeforeValidator(partial(one_of, choices=MATERIAL_CLASSES))] = ""
    factors: dict[str, Annotated[str, BeforeValidator(_factor)]] = {}


class InductorTable(_Table):
    """An air-cored mutual inductor."""

    mutual_inductance: MutualInductance | None = None


def _column(value: Any) -> str | int:
    if isinstance(value, str) and value.strip():
        return value
    if isinstance(value, int) and not isinstance(value, bool) and 1 <= value <= 10_000:
        return value
    raise refuse("a column's name in quotes, or its number counted from 1", shown(value))


ColumnChoice = Annotated[str | int, BeforeValidator(_column)]


class ColumnsTable(_Table):
    """Which column of a capture is what."""

    time: ColumnChoice = "time"
    field: ColumnChoice = "field"
    induction: ColumnChoice = "induction"
    sample_rate: Rate | None = None


def _limit(value: Any) -> float:
    wanted = "a number above 0, e.g. 0.02"
    number = value
    if isinstance(value, str):
        try:
            number = parse_quantity(value, "").value
        except QuantityError:
            raise refuse(wanted, shown(value)) from None
    if isinstance(number, bool) or not isinstance(number, (int, float)):
        raise refuse(wanted, shown(value))
    if not math.isfinite(number) or number <= 0:
        raise refuse(wanted, shown(value))
    return float(number)


def _limit_of_loss(value: Any) -> float:
    # The one limit that is zero unless changed: how far below zero a loop's area may lie.
    return 0.0 if value in (0, "0") and not isinstance(value, bool) else _limit(value)


Limit = Annotated[float, BeforeValidator(_limit)]
LossLimit = Annotated[float, BeforeValidator(_limit_of_loss)]


class LimitsTable(_Table):
    """Other limits for marks.

    The marks are named here again since this folder stands before their own table; a test holds the
    two together.
    """

    few_samples: Limit | None = None
    few_cycles: Limit | None = None
    unsteady: Limit | None = None
    flux_not_sinusoidal: Limit | None = None
    open_loop: Limit | None = None
    biased: Limit | None = None
    delay_dominates: Limit | None = None
    eddy_shielded: Limit | None = None
    thick_ring: Limit | None = None
    off_setting: Limit | None = None
    loss_below_zero: LossLimit | None = None
    coarse: Limit | None = None
    repeat_differs: Limit | None = None
    many_crossings: Limit | None = None
    warmed_up: Limit | None = None
    mass_and_size_disagree: Limit | None = None
    not_demagnetised: Limit | None = None
    claims_too_much: Limit | None = None


def _format(value: Any) -> int:
    wanted = f"the format of the sheet, {SHEET_FORMAT}"
    if isinstance(value, bool) or not isinstance(value, int) or value < 1:
        raise refuse(wanted, shown(value))
    if value > SHEET_FORMAT:
        raise refuse(wanted, f"{value}, a newer format", "Install a newer workbench, or write the sheet for this one.")
    return value


class Sheet(_Table):
    """The whole of campaign.toml."""

    sheet: Annotated[int, BeforeValidator(_format)]
    title: Text
    operator: Text = ""
    columns: ColumnsTable = ColumnsTable()
    circuits: dict[str, CircuitTable]
    specimens: dict[str, SpecimenTable]
    inductors: dict[str, InductorTable] = {}
    limits: LimitsTable = LimitsTable()


def model_at(place: tuple[str, ...]) -> type[BaseModel] | None:
    """The table's model at a place in the sheet, the sensor's name included.

    Examples
    --------
    >>> model_at(("circuits", "main", "field", "shunt")).__name__, model_at(("specimens", "R1")).__name__
    ('Shunt', 'SpecimenTable')
    """
    match place:
        case ():
            return Sheet
        case ("columns",):
            return ColumnsTable
        case ("limits",):
            return LimitsTable
        case ("circuits", _):
            return CircuitTable
        case ("circuits", _, "field" | "induction" as role, sensor):
            return SENSORS[role].get(sensor)
        case ("specimens", _):
            return SpecimenTable
        case ("inductors", _):
            return InductorTable
    return None
