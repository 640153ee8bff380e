"""The three panes on paper: matplotlib pictures of the same derived arrays as on the screen."""

from __future__ import annotations

import base64
import io
import warnings
from html import escape
from typing import Any

import numpy as np
from matplotlib import rc_context
from matplotlib.axes import Axes
from matplotlib.collections import PolyCollection
from matplotlib.figure import Figure
from matplotlib.patheffects import Normal, Stroke
from matplotlib.ticker import FixedFormatter, FixedLocator, NullLocator

from workbench.views import markup
from workbench.views.colours import HOLE
from workbench.views.derived.index import StoreLike, run_index
from workbench.views.derived.loops import LoopFamily
from workbench.views.derived.lossmap import LossMap
from workbench.views.derived.overview import Overview
from workbench.views.derived.page import Page, page
from workbench.views.derived.permeability import PermeabilityCurves
from workbench.views.derived.settle import settled, start
from workbench.views.derived.ticks import AxisPlan
from workbench.views.selection import Choice, Selection

_DASHES = {"solid": "-", "dashed": (0, (5, 3)), "dash_dotted": (0, (5, 2, 1, 2)), "dotted": (0, (1, 2.5))}
_SIGN: dict[str, Any] = {"marker": "^", "color": "white", "edgecolor": "black", "linewidth": 0.9, "s": 34, "zorder": 6}
_SETTINGS: Any = {
    "svg.fonttype": "none",  # text stays text: small, and found by a search
    "svg.hashsalt": "workbench",  # the same picture gives the same bytes
    "font.family": ["DejaVu Sans"],
    "font.size": 9,
}


def panes_figure(made: Page) -> Figure:
    """Loops, permeability and map side by side, 10.4 in wide, with the key of alloys above."""
    with rc_context(_SETTINGS):
        figure = Figure(figsize=(10.4, 3.9))
        axes = figure.subplots(1, 3)
        figure.subplots_adjust(left=0.065, right=0.985, top=0.78, bottom=0.14, wspace=0.3)
        _draw_loops(axes[0], made.loops)
        _draw_permeability(axes[1], made.permeability)
        _draw_map(axes[2], made.map)
        _draw_key(figure, made)
    return figure


def picture(store: StoreLike, selection: Selection | Choice | None = None) -> str:
    """The three panes as SVG text; without a selection those of the first view.

    Parameters
    ----------
    store : Store
    selection : Selection or Choice, optional
    """
    wanted = selection.choice() if isinstance(selection, Selection) else selection
    index = run_index(store, wanted.show_set_aside if wanted else False)
    choice = settled(index, wanted) if wanted else start(index)
    if not choice.specimens:
        return '<svg xmlns="http://www.w3.org/2000/svg" width="1" height="1"></svg>'
    return svg(panes_figure(page(index, choice)))


def svg(figure: Figure) -> str:
    """A figure as SVG text, the same for the same picture."""
    buffer = io.StringIO()
    with rc_context(_SETTINGS), warnings.catch_warnings():
        # A name from a file may hold letters that the font lacks; they are left to the reader's font.
        warnings.filterwarnings("ignore", message="Glyph .* missing")
        figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None})
    return buffer.getvalue()


def fallback(made: Page, glance: Overview) -> str:
    """Picture and readout as HTML without scripts, for a notebook without a kernel."""
    code = base64.b64encode(svg(panes_figure(made)).encode()).decode()
    said = "; ".join((made.loops.summary, made.permeability.summary, made.map.summary))
    return (
        f"<div><b>{escape(glance.title)}</b> {escape(glance.line)}</div>"
        f'<img src="data:image/svg+xml;base64,{code}" alt="{escape(said)}" style="max-width:100%;background:#fff">'
        f"<p>{escape(made.status)}</p>{markup.least_loss(made.least)}{markup.readout_table(made.readout)}"
    )


def _frame(axes: Axes, x: AxisPlan, y: AxisPlan, labels: tuple[str, str], title: str) -> None:
    for axis, plan, name in ((axes.xaxis, x, "x"), (axes.yaxis, y, "y")):
        axes.set(**{f"{name}scale": "log" if plan.log else "linear", f"{name}lim": (plan.low, plan.high)})
        axis.set_major_locator(FixedLocator(plan.ticks))
        axis.set_major_formatter(FixedFormatter(plan.texts))
        axis.set_minor_locator(NullLocator())
    axes.set_xlabel(labels[0], labelpad=2)
    axes.set_ylabel(labels[1], labelpad=2)
    # A fixed height, or the title of the map would make way for its colour strip.
    axes.set_title(title, fontsize=9, loc="left", y=1.02, parse_math=False)
    axes.tick_params(labelsize=8, length=3)
    axes.spines[["top", "right"]].set_visible(False)


def _draw_loops(axes: Axes, shown: LoopFamily) -> None:
    axes.axhline(0, color="#888888", linewidth=0.5)
    axes.axvline(0, color="#888888", linewidth=0.5)
    for field, induction, strength in zip(shown.field, shown.induction, shown.strength, strict=True):
        axes.plot(field, induction, color=shown.look.colour, alpha=float(strength), linewidth=0.8)
    for curve in (*shown.beside, *([shown.chosen] if shown.chosen else [])):
        width = 2.0 if curve is shown.chosen else 1.1
        style: Any = _DASHES[curve.look.dash]
        axes.plot(curve.field, curve.induction, color=curve.look.colour, linestyle=style, linewidth=width)
    axes.scatter(shown.tip_field, shown.tip_induction, c=list(shown.tip_colours), s=9, zorder=5)
    axes.scatter(shown.tip_field[shown.tip_doubtful], shown.tip_induction[shown.tip_doubtful], **_SIGN)
    _frame(axes, shown.field_axis, shown.induction_axis, (shown.field_label, "B / T"), f"Loops  {shown.title}")


def _draw_permeability(axes: Axes, shown: PermeabilityCurves) -> None:
    for x, y in shown.band:
        axes.fill(x, y, color=shown.front_colour, alpha=0.25, linewidth=0)
    for curve in shown.curves:
        style: Any = _DASHES[curve.look.dash]
        axes.plot(curve.x, curve.y, color=curve.look.colour, linestyle=style, linewidth=1.2, marker="o", markersize=3)
        axes.scatter(curve.x[curve.doubtful], curve.y[curve.doubtful], **_SIGN)
    if shown.held is not None:
        axes.axvline(shown.held, color="#888888", linewidth=0.8, linestyle="--")
    if shown.chosen is not None:
        axes.plot(*shown.chosen, "o", markersize=9, fillstyle="none", color=shown.front_colour)
    _frame(axes, shown.x_axis, shown.y_axis, (shown.x_label, shown.y_label), f"Permeability  {shown.title}")


def _draw_map(axes: Axes, shown: LossMap) -> None:
    y_axis = shown.y_axis.unit()
    for tiles, colours in ((shown.tiles, list(shown.colours)), (shown.holes, [HOLE])):
        corners = np.stack([tiles.x, shown.y_axis.place(tiles.y)], axis=-1)
        axes.add_collection(PolyCollection(list(corners), facecolors=colours, edgecolors="white", linewidths=0.4))
    for x, y, text in zip(*shown.hole_places, shown.hole_words, strict=True):
        axes.text(x, y, text, ha="center", va="center", fontsize=6.5, parse_math=False)
    for x, y in zip(shown.lines.x, shown.lines.y, strict=True):
        axes.plot(x, shown.y_axis.place(y), color="white", linewidth=1.8)
        axes.plot(x, shown.y_axis.place(y), color="black", linewidth=0.7)
    for x, y, text in zip(*shown.line_places, shown.lines.texts, strict=True):
        halo = [Stroke(linewidth=1.6, foreground="white"), Normal()]
        axes.text(x, y, text, ha="center", va="center", fontsize=7, path_effects=halo)
    axes.scatter(*shown.doubt_places, **_SIGN)
    if shown.outline is not None:
        x, y = shown.outline[0], shown.y_axis.place(shown.outline[1])
        for colour, width in (("black", 3.2), ("white", 1.5)):
            axes.fill(x, y, fill=False, edgecolor=colour, linewidth=width, zorder=4)
    _frame(axes, shown.x_axis, y_axis, (shown.x_label, shown.y_label), f"Map  {shown.title}")
    _draw_strip(axes, shown)


def _draw_strip(axes: Axes, shown: LossMap) -> None:
    bar = axes.inset_axes((0.3, 1.2, 0.7, 0.035))
    bar.imshow(np.linspace(0, 1, 128)[None], aspect="auto", cmap="viridis", extent=(0, 1, 0, 1))
    bar.set_yticks([])
    bar.set_xticks(list(shown.strip.unit().ticks), list(shown.strip.texts), fontsize=7)
    bar.tick_params(length=2, pad=1)
    bar.text(-0.04, 0.5, shown.strip_label, ha="right", va="center", fontsize=8)


def _draw_key(figure: Figure, made: Page) -> None:
    handles = []
    for _, look, _ in made.key:
        style: Any = _DASHES[look.dash]
        handles.append(figure.axes[0].plot([], [], color=look.colour, linestyle=style, linewidth=1.6)[0])
    names = [_plain(f"{alloy}: {specimens}") for alloy, _, specimens in made.key]
    figure.legend(handles, names, loc="upper left", ncols=2, fontsize=8, frameon=False, bbox_to_anchor=(0.05, 1.0))


def _plain(text: str) -> str:
    # A dollar sign in a name would begin a formula.
    return text.replace("$", r"\$")
