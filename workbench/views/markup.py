"""The page's texts as HTML.  Whatever comes from a file is escaped here, and nowhere else."""

from __future__ import annotations

import re
from collections.abc import Sequence
from html import escape

from workbench.views.colours import HOLE, SVG_DASHES, Look, map_colours
from workbench.views.derived.least import LeastLoss
from workbench.views.derived.lossmap import LossMap
from workbench.views.derived.overview import Overview
from workbench.views.derived.readout import Column, Readout
from workbench.views.derived.ticks import SUPERSCRIPTS

_POWER = re.compile(r"\((.*)\)e\+?0?(-?\d+)")

MOST_LISTED = 200

DOUBT_SIGN = (
    '<svg width="12" height="11" aria-hidden="true"><path d="M6 1 L11 10 L1 10 Z" '
    'fill="#fff" stroke="#000" stroke-width="1.3"/></svg>'
)


def header(overview: Overview, cautions: Sequence[str]) -> str:
    """Title, counts with their lists, and the cautions, folded."""
    parts = [f'<span class="wb-title">{escape(overview.title)}</span>', f"<span>{escape(overview.line)}</span>"]
    lists = (("doubtful", overview.doubtful), ("set aside", overview.set_aside), ("failed", overview.failed))
    parts += [_folded(f"{len(lines)} {name}", lines) for name, lines in lists if lines]
    reminder = "Cautions" if not overview.cautions else f"Cautions ({len(overview.cautions)} of this campaign)"
    parts.append(_folded(reminder, [*overview.cautions, *cautions], "wb-caution"))
    return f'<div class="wb-head">{"".join(parts)}</div>'


def _folded(summary: str, lines: Sequence[str], kind: str = "") -> str:
    items = "".join(f"<li>{escape(line)}</li>" for line in lines[:MOST_LISTED])
    if len(lines) > MOST_LISTED:
        items += f"<li>and {len(lines) - MOST_LISTED} more</li>"
    return f'<details class="{kind}"><summary>{escape(summary)}</summary><ul>{items}</ul></details>'


def key(entries: Sequence[tuple[str, Look, str]], holes: bool, doubts: bool) -> str:
    """The key of hues, dashes and signs, shared by all panes."""
    parts = [
        f'<span class="wb-entry">{_swatch(look)}<b>{escape(alloy)}</b> {escape(specimens)}</span>'
        for alloy, look, specimens in entries
    ]
    if doubts:
        parts.append(f'<span class="wb-entry">{DOUBT_SIGN} doubtful run, look before use</span>')
    if holes:
        parts.append(f'<span class="wb-entry"><i style="background:{HOLE}"></i> no figure</span>')
    return f'<div class="wb-key">{"".join(parts)}</div>'


def _swatch(look: Look) -> str:
    return (
        f'<svg class="wb-swatch" width="34" height="8" aria-hidden="true"><line x1="1" y1="4" x2="33" y2="4" '
        f'stroke="{look.colour}" '
        f'stroke-width="2.5" stroke-dasharray="{SVG_DASHES[look.dash]}"/></svg>'
    )


def heading(name: str, title: str, under: str = "") -> str:
    """Name and state of a pane; `under` is markup of ours."""
    return (
        f'<div class="wb-pane-head"><div class="wb-pane-title" title="{escape(title)}"><b>{escape(name)}</b> '
        f'{escape(title)}</div><div class="wb-under">{under}</div></div>'
    )


def note(text: str) -> str:
    """A plain line under a pane's name."""
    return f'<span title="{escape(text)}">{escape(text)}</span>'


def ramp(colour: str, ends: Sequence[str]) -> str:
    """The strength of the hue along a family, its ends named."""
    if len(ends) < 2:
        return f"<span>{escape(''.join(ends))}</span>"
    return (
        f'<span class="wb-ramp">{escape(ends[0])} '
        f'<i style="background:linear-gradient(to right,{colour}66,{colour}ff)"></i> {escape(ends[1])}</span>'
    )


def strip(view: LossMap) -> str:
    """The colour strip of the map, with ticks."""
    stops = ",".join(map_colours([place / 8 for place in range(9)]))
    ticks = "".join(
        f'<span style="left:{100 * float(view.strip.place(tick)):.1f}%">{escape(text)}</span>'
        for tick, text in zip(view.strip.ticks, view.strip.texts, strict=True)
    )
    return (
        f'<div class="wb-strip"><span class="wb-strip-name">{escape(view.strip_label)}</span>'
        f'<div class="wb-strip-bar"><i style="background:linear-gradient(to right,{stops})"></i>'
        f'<div class="wb-strip-ticks">{ticks}</div></div></div>'
    )


def caption(text: str) -> str:
    """What a pane says in words."""
    return f'<div class="wb-caption" title="{escape(text)}">{escape(text)}</div>'


def status(text: str, trouble: bool = False) -> str:
    """The one line that says how things stand, read out by screen readers when it changes."""
    return f'<div role="status" class="wb-status{" wb-trouble" if trouble else ""}">{escape(text)}</div>'


def log(traceback: str) -> str:
    """The traceback of the last failure, folded."""
    summary = "<summary>details of the last failure</summary>"
    return f'<details class="wb-log">{summary}<pre>{escape(traceback)}</pre></details>' if traceback else ""


def least_loss(shown: LeastLoss) -> str:
    """The order of loss at the held state: those that cannot be told apart are bracketed."""
    parts: list[str] = []
    for number, place in enumerate(shown.places, 1):
        sign = f" {DOUBT_SIGN}" if place.doubtful else ""
        alloy = f" {escape(place.alloy)}" if number == 1 and place.alloy != place.specimen else ""
        one = f"<b>{number} {escape(place.specimen)}</b>{alloy} {escape(place.said)}{sign}"
        if place.tied:
            parts[-1] += f" · {one}"
        else:
            parts.append(one)
    parts = [f"[ {part} ] <i>cannot tell</i>" if " · <b>" in part else part for part in parts]
    parts += [f"{escape(name)} {escape(why)}" for name, why in shown.out]
    order = "".join(f"<span>{part}</span>" for part in parts)
    return f'<div class="wb-least"><span>Least loss at {escape(shown.state)}:</span>{order}</div>'


def readout_table(table: Readout) -> str:
    """The figures of the chosen setting as a plain table."""
    heads = "".join(_head(column) for column in table.columns)
    body = "".join(
        f'<tr><th scope="row" title="{escape(meaning)}"><b>{escape(symbol)}</b> <span>{escape(unit)}</span></th>'
        f"{''.join(_figure(column.figures[place]) for column in table.columns)}</tr>"
        for place, (symbol, unit, meaning) in enumerate(table.rows)
        if any(column.figures[place] not in ("", "not computable") for column in table.columns)
    )
    foot = "".join(
        f'<tr class="wb-words"><th scope="row">{name}</th>'
        f"{''.join(f'<td colspan=2>{cell}</td>' for cell in cells)}</tr>"
        for name, cells in _words(table.columns)
        if any(cells)
    )
    more = f" ({table.left_out} more specimens are chosen)" if table.left_out else ""
    caption_ = f"<caption>{escape(table.title)}: value ± U (k = 2){more}</caption>"
    return (
        f'<div class="wb-scroll"><table class="wb-table">{caption_}'
        f"<thead><tr><th></th>{heads}</tr></thead><tbody>{body}{foot}</tbody></table></div>"
    )


def _head(column: Column) -> str:
    front = " · in front" if column.in_front else ""
    return f'<th scope="col" colspan=2>{escape(column.specimen)}<br><span>{escape(column.alloy)}{front}</span></th>'


def _figure(text: str) -> str:
    power = _POWER.fullmatch(text)
    if power:
        text = f"{power[1]} ×10{power[2].translate(SUPERSCRIPTS)}"
    value, sign, spread = text.partition(" ± ")
    if not sign:
        return f'<td class="wb-value">{escape(text) or "–"}</td><td></td>'
    return f'<td class="wb-value">{escape(value)}</td><td class="wb-spread">± {escape(spread)}</td>'


def _words(columns: Sequence[Column]) -> list[tuple[str, list[str]]]:
    return [
        ("figures read", [escape(column.between) for column in columns]),
        ("doubts", [_lines(column.doubts, f"{DOUBT_SIGN} ") for column in columns]),
        ("notes", [_lines(column.notes) for column in columns]),
        ("standing", [escape(column.standing) for column in columns]),
        ("remark", [escape(column.remark) for column in columns]),
        ("capture", [f"<code>{escape(column.capture)}</code>" if column.capture else "" for column in columns]),
        ("repeat", [escape(column.repeats) for column in columns]),
    ]


def _lines(lines: Sequence[str], sign: str = "") -> str:
    return "<br>".join(f"{sign}{escape(line)}" for line in lines)
