"""Charts as SVG or PNG by matplotlib: readable in grey, the same bytes for the same chart."""

from __future__ import annotations

import io
import math
import threading
from typing import TYPE_CHECKING, Any

import numpy as np

from envcorr.document.blocks import Band, Region, Scale

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["render"]

_INK, _SOFT, _FILL = "#1d2529", "#56636a", "#dfe4e7"
_SETTINGS: Any = {
    "svg.hashsalt": "envcorr",
    "svg.fonttype": "path",
    "font.family": "DejaVu Sans",
    "font.size": 9,
    "hatch.linewidth": 0.6,
    "axes.edgecolor": _SOFT,
    "text.color": _INK,
    "axes.labelcolor": _INK,
}
_ONE_AT_A_TIME = threading.Lock()
"""matplotlib's settings are those of the whole process."""


def render(chart: Region | Band, form: str = "svg") -> bytes:
    """Return the chart as a picture, ``form`` being "svg" or "png"."""
    import matplotlib as mpl
    from matplotlib.figure import Figure

    with _ONE_AT_A_TIME, mpl.rc_context(_SETTINGS):
        figure = Figure(figsize=(6.4, 4.4), layout="constrained")
        axes = figure.add_subplot()
        axes.set_title(chart.title, fontsize=10, loc="left")
        if isinstance(chart, Region):
            _region(axes, chart)
        else:
            _band(axes, chart)
        out = io.BytesIO()
        metadata = {"Date": None, "Creator": "envcorr"} if form == "svg" else {"Software": "envcorr"}
        figure.savefig(out, format=form, dpi=150, metadata=metadata)
    return out.getvalue()


def _scales(axes: Axes, x: Scale, y: Scale | None = None) -> None:
    for scale, name in ((x, "x"), (y, "y")):
        if scale is not None:
            getattr(axes, f"set_{name}label")(scale.caption)
            getattr(axes, f"set_{name}scale")("log" if scale.logarithmic else "linear")
            getattr(axes, f"set_{name}lim")(scale.values[0], scale.values[-1])


def _region(axes: Axes, chart: Region) -> None:
    x, y, p = np.array(chart.x.values), np.array(chart.y.values), np.array(chart.probability)
    _scales(axes, chart.x, chart.y)
    known = np.nan_to_num(p, nan=0.0)
    axes.contourf(x, y, known, levels=[-0.01, chart.demanded], colors=["white"], hatches=["///"])
    if np.any(known >= chart.demanded):
        axes.contourf(x, y, known, levels=[chart.demanded, 1.01], colors=[_FILL])
    if np.isnan(p).any():
        axes.contourf(x, y, np.isnan(p).astype(float), levels=[0.5, 1.5], colors=["white"], hatches=["xxxx"])
    if known.min() < chart.demanded <= known.max():
        axes.contour(x, y, known, levels=[chart.demanded], colors=[_INK], linewidths=1.8)
    (point,) = axes.plot([chart.x.now], [chart.y.now], "o", color="white", markeredgecolor=_INK, markersize=9, mew=1.8)
    point.set_label("now")
    from matplotlib.patches import Patch

    handles: list[Any] = [
        Patch(facecolor=_FILL, edgecolor=_SOFT, label=f"reached ({100 * chart.demanded:g} %)"),
        Patch(facecolor="white", edgecolor=_SOFT, hatch="///", label="not reached"),
        point,
    ]
    if np.isnan(p).any():
        handles.append(Patch(facecolor="white", edgecolor=_SOFT, hatch="xxxx", label="not computed"))
    axes.legend(handles=handles, loc="upper center", bbox_to_anchor=(0.5, -0.16), ncols=len(handles), frameon=False)


def _band(axes: Axes, chart: Band) -> None:
    x = np.array(chart.x.values)
    _scales(axes, chart.x)
    axes.set_ylabel(chart.caption)
    axes.fill_between(x, chart.low, chart.high, color=_FILL, label="coverage interval", linewidth=0)
    for edge in (chart.low, chart.high):
        axes.plot(x, edge, color=_SOFT, linewidth=0.8)
    axes.plot(x, chart.mean, color=_INK, linewidth=1.6, label="mean error")
    for sign in (1, -1):
        axes.axhline(
            sign * chart.allowed, color=_INK, linestyle="--", linewidth=1, label="allowed" if sign > 0 else None
        )
    if x[0] <= chart.x.now <= x[-1]:
        axes.axvline(chart.x.now, color=_INK, linestyle=":", linewidth=1.2, label="now")
    finite = [v for v in (*chart.low, *chart.high) if math.isfinite(v)]
    if finite and max(map(abs, finite)) > 50 * chart.allowed:  # a far end would flatten what is asked
        axes.set_yscale("symlog", linthresh=10.0 ** math.floor(math.log10(chart.allowed)))
    axes.legend(loc="upper center", bbox_to_anchor=(0.5, -0.16), ncols=4, frameon=False)
