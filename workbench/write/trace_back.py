"""From a figure back to its capture: one run's whole way, as text for a terminal and as HTML for a notebook."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from contextlib import suppress
from dataclasses import dataclass
from html import escape

from workbench.base.errors import StoreError, nearest
from workbench.base.uncertainty import with_uncertainty
from workbench.base.vocabulary import BOUNDED_AT_ZERO, QUANTITIES, label, shown_unit
from workbench.capture.campaign import Campaign, RunLine
from workbench.capture.read import read_campaign, read_capture
from workbench.capture.record import Record
from workbench.loop.assemble import Loop, assemble
from workbench.quantities.reduction import reduce_record
from workbench.quantities.result import RunResult
from workbench.quantities.stages import SHOWN, Stage, stages
from workbench.store.calibration import calibrate
from workbench.store.open import Store
from workbench.theory.answers import penetration_of, radial_bias_of
from workbench.theory.refusal import TheoryError
from workbench.write.plain import aligned

_HEADLINE = ("specific_loss", "loss_per_cycle", "amplitude_permeability", "induction_tip")
_REPEATS_HELP = 0.25
"""Share of the scatter in the variance from which more repeats make a visible difference."""
Table = tuple[str, tuple[str, ...], list[tuple[str, ...]]]
"""(title, head, rows)"""


@dataclass(frozen=True)
class TraceBack:
    """One run from its file to its figures; its text and its HTML say the same."""

    sentence: str
    facts: tuple[tuple[str, str], ...]
    tables: tuple[Table, ...]
    marks: tuple[str, ...]

    def __str__(self) -> str:
        lines = [self.sentence, "", *aligned(("", ""), self.facts)[1:]]
        for title, head, rows in self.tables:
            lines += ["", title, *aligned(head, rows)]
        lines += ["", "marks", *(self.marks or ("none",))]
        return "\n".join(lines)

    def _repr_html_(self) -> str:
        facts = "".join(f"<tr><th scope='row'>{escape(k)}</th><td>{escape(v)}</td></tr>" for k, v in self.facts)
        parts = [f"<p><b>{escape(self.sentence)}</b></p><table>{facts}</table>"]
        for title, head, rows in self.tables:
            top = "".join(f"<th scope='col'>{escape(cell)}</th>" for cell in head)
            body = "".join("<tr>" + "".join(f"<td>{escape(cell)}</td>" for cell in row) + "</tr>" for row in rows)
            parts.append(f"<table><caption>{escape(title)}</caption><tr>{top}</tr>{body}</table>")
        marks = "".join(f"<li>{escape(mark)}</li>" for mark in self.marks) or "<li>none</li>"
        return "".join(parts) + f"<p>marks</p><ul>{marks}</ul>"


def trace_back(store: Store, capture: str) -> TraceBack:
    """The whole way of one run: file, what was read, corrections, quantities, budgets, marks.

    Parameters
    ----------
    store : Store      its campaign folder has to be there: the capture is read and reduced again
    capture : str      as runs.csv names it

    Raises
    ------
    StoreError         no such run, no campaign folder, or the capture is not the one that was reduced
    CaptureError       the capture cannot be read any more
    """
    names = store.runs["capture"].values.tolist()
    if capture not in names:
        raise StoreError(
            f"Tracing back '{capture}': wanted a run of {store.path}; found none. {nearest(capture, names[:20])}"
        )
    run = store.runs.isel(run=names.index(capture))
    campaign = _campaign(store)
    line = next(each for each in campaign.runs if each.capture == capture)
    record = read_capture(campaign, line)
    if record.sha256 != str(run["capture_sha256"].values):
        raise StoreError(
            f"Tracing back '{capture}': wanted the file that was reduced; found another content. "
            "Reduce the campaign again."
        )
    if line.kind in ("air", "initial"):
        return TraceBack(str(run["seen"].values), _of_the_file(line, record), (), ())
    specimen, circuit = campaign.specimens[line.specimen], campaign.circuits[line.circuit]
    result = reduce_record(record, line, specimen, circuit, campaign.limits)
    loop = assemble(record, specimen, circuit, line.frequency)
    tables = (_corrections(stages(loop)), _quantities(result), *_budgets(result))
    facts = (
        *_of_the_file(line, record),
        ("repeats", _repeats(campaign, line)),
        *_of_the_period(loop),
        *_of_the_geometry(store, capture),
    )
    return TraceBack(_sentence(result), facts, tables, tuple(filter(None, str(run["seen"].values).split("\n"))))


def _campaign(store: Store) -> Campaign:
    if not store.campaign_folder.is_dir():
        raise StoreError(
            f"Tracing back a run of {store.path}: wanted the campaign folder {store.campaign_folder}; found none. "
            "Put the folder back beside the store: captures are not kept in it."
        )
    runs = store.runs
    aside = set(runs["capture"].values[runs["standing"].values == "set aside"].tolist())
    return calibrate(read_campaign(store.campaign_folder), aside).campaign


def _sentence(result: RunResult) -> str:
    """Value, the largest share, and whether more repeats would help."""
    name = next(each for each in _HEADLINE if math.isfinite(result.values[each]))
    word, shares = QUANTITIES[name], result.budget[name]
    value = f"{word.symbol} = {_shown(result, name)}"
    total = sum(share**2 for share in shares.values())
    if total == 0:
        return f"{value}; the sheet states no uncertainty."
    largest = max(shares, key=lambda source: abs(shares[source]))
    scatter = shares.get("scatter", 0.0) ** 2 / total
    helps = "more repeats will help" if scatter > _REPEATS_HELP else "more repeats will not help"
    share = shares[largest] ** 2 / total
    return f"{value} (k = 2); largest share: {largest.replace('_', ' ')}, {share:.0%} of the variance; {helps}."


def _shown(result: RunResult, name: str) -> str:
    unit = shown_unit(QUANTITIES[name].unit)
    bounded = name in BOUNDED_AT_ZERO
    return with_uncertainty(result.values[name], result.uncertainties[name], unit, bounded_at_zero=bounded)


def _of_the_file(line: RunLine, record: Record) -> tuple[tuple[str, str], ...]:
    rate = "none (a figure without time base)" if math.isnan(record.sample_rate) else f"{record.sample_rate:.9g} Hz"
    return (
        ("capture", line.capture),
        ("SHA-256 of the file", record.sha256),
        ("setting", f"{line.specimen}, {line.frequency:g} Hz, {line.temperature:g} °C, circuit {line.circuit}"),
        ("samples", f"{len(record)} of field in {record.field_unit} and induction in {record.induction_unit}"),
        ("sampling rate", rate),
        ("steps", f"{record.field_step:.3g} {record.field_unit}, {record.induction_step:.3g} {record.induction_unit}"),
        ("remark", line.remark or "none"),
    )


def _repeats(campaign: Campaign, line: RunLine) -> str:
    """How many runs the run list has at this setting, and what one alone leaves open."""
    ours = repr(_setting(line))
    count = sum(repr(_setting(each)) == ours for each in campaign.runs)
    return f"{count} at this setting" if count > 1 else "one: the part between repeats is unknown"


def _setting(line: RunLine) -> tuple[object, ...]:
    return (
        line.specimen, line.circuit, line.kind, line.frequency, line.temperature, line.peak_field, line.peak_induction,
    )  # fmt: skip


def _of_the_period(loop: Loop) -> tuple[tuple[str, str], ...]:
    wave = loop.waveform
    field, induction = loop.kept
    noise = ", ".join(f"{each:.3g} {unit}" for each, unit in zip(wave.noise, ("(field)", "(induction)"), strict=True))
    return (
        ("fundamental", with_uncertainty(wave.frequency, wave.frequency_noise, "Hz")),
        ("cycles", f"{wave.cycles:.3f} of {wave.samples_per_cycle:.1f} samples"),
        ("noise of a sample", noise),
        ("harmonics above the noise", f"{field} of the field, {induction} of the induction"),
        ("polarity", "turned round" if loop.harmonics.swapped else "as recorded"),
    )


def _of_the_geometry(store: Store, capture: str) -> tuple[tuple[str, str], ...]:
    """What the figures of the mean path leave out: the radial spread of H, and shielding of the strip."""
    facts = []
    for name, ask in (("across the ring", radial_bias_of), ("across the strip", penetration_of)):
        # A circuit without diameters or thickness has nothing to say here.
        with suppress(TheoryError):
            facts.append((name, str(ask(store, capture))))
    return tuple(facts)


def _corrections(found: list[Stage]) -> Table:
    head = ("after", *map(label, SHOWN), "change of W")
    rows = []
    for place, stage in enumerate(found):
        before = found[place - 1].values["loss_per_cycle"] if place else math.nan
        change = "" if place == 0 else f"{stage.values['loss_per_cycle'] / before - 1:+.3%}"
        rows.append((stage.name, *(f"{stage.values[name]:.6g}" for name in SHOWN), change))
    return "corrections, one after the other", head, rows


def _quantities(result: RunResult) -> Table:
    rows: list[tuple[str, ...]] = [
        (word.symbol, _shown(result, name), word.meaning) for name, word in QUANTITIES.items()
    ]
    return "quantities, value ± U (k = 2)", ("", "value", "meaning"), rows


def _budgets(result: RunResult) -> Iterator[Table]:
    for name, shares in result.budget.items():
        if any(shares.values()):
            yield f"budget of {QUANTITIES[name].symbol}", ("input", "share c·u", "of the variance"), _shares(shares)


def _shares(shares: Mapping[str, float]) -> list[tuple[str, ...]]:
    total = sum(share**2 for share in shares.values())
    ordered = sorted((source for source in shares if shares[source]), key=lambda source: -abs(shares[source]))
    return [
        (source.replace("_", " "), f"{shares[source]:+.3g}", f"{shares[source] ** 2 / total:.1%}") for source in ordered
    ]
