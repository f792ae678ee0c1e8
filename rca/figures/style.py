"""One look for every figure: fonts, sizes, colours and dashes that survive grey printing."""

import io
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

import matplotlib as mpl
from matplotlib import font_manager
from matplotlib.axes import Axes
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure

FAMILY = "Source Sans 3"
TEXT_WIDTH_IN = 6.3
HALF_WIDTH_IN = 3.05
HASH_SALT = "rca"

INK = "#1d2429"
GREY = "#5b6770"
PALE = "#d5dade"
SUCTION = "#1f4e79"
DISCHARGE = "#b8560f"
NEITHER = "#5b6770"
GOOD = "#3b7a57"


@dataclass(frozen=True, slots=True)
class Mark:
    """A colour with a dash and a marker of its own, so that colour never stands alone."""

    colour: str
    dash: tuple[float, ...] | str
    marker: str


MARKS: Mapping[str, Mark] = {
    "suction": Mark(SUCTION, "-", "o"),
    "discharge": Mark(DISCHARGE, (5, 1.5), "s"),
    "neither": Mark(NEITHER, (1, 1.5), "^"),
    "good": Mark(GOOD, (6, 2, 1, 2), "D"),
}


def font_folder() -> Path:
    """The folder of the bundled open-licence fonts."""
    return Path(str(files("rca.figures"))) / "fonts"


@cache
def _register_fonts() -> None:
    for path in sorted(font_folder().glob("*.ttf")):
        font_manager.fontManager.addfont(path)


def rc() -> dict[Any, Any]:
    """Matplotlib settings of every figure."""
    _register_fonts()
    return {
        "font.family": FAMILY,
        "font.size": 8.5,
        "axes.labelsize": 8.5,
        "axes.titlesize": 8.5,
        "xtick.labelsize": 8,
        "ytick.labelsize": 8,
        "legend.fontsize": 8,
        "axes.edgecolor": GREY,
        "axes.labelcolor": INK,
        "text.color": INK,
        "xtick.color": GREY,
        "ytick.color": GREY,
        "xtick.labelcolor": INK,
        "ytick.labelcolor": INK,
        "axes.linewidth": 0.6,
        "axes.spines.top": False,
        "axes.spines.right": False,
        "grid.color": PALE,
        "grid.linewidth": 0.5,
        "lines.linewidth": 1.2,
        "xtick.major.width": 0.6,
        "ytick.major.width": 0.6,
        "legend.frameon": False,
        "figure.facecolor": "white",
        "savefig.facecolor": "white",
        "svg.fonttype": "path",  # the page then needs no font to show the figure right
        "svg.hashsalt": HASH_SALT,
        "figure.constrained_layout.use": True,
        "axes.unicode_minus": True,
    }


def new_figure(
    *,
    height_in: float = 2.6,
    width_in: float = TEXT_WIDTH_IN,
    rows: int = 1,
    columns: int = 1,
    sharex: bool = False,
    height_ratios: list[float] | None = None,
) -> tuple[Figure, list[Axes]]:
    """A figure of the house and its axes, row by row."""
    # Texts take their font from these settings when they are made, which is after this returns.
    mpl.rcParams.update(rc())
    figure = Figure(figsize=(width_in, height_in), layout="constrained")
    grid = figure.subplots(
        rows,
        columns,
        sharex=sharex,
        squeeze=False,
        gridspec_kw={"height_ratios": height_ratios} if height_ratios else None,
    )
    return figure, list(grid.flat)


def svg_bytes(figure: Figure) -> bytes:
    """The figure as SVG; the same figure gives the same bytes."""
    out = io.BytesIO()
    with mpl.rc_context(rc()):
        FigureCanvasSVG(figure).print_svg(out, metadata={"Date": None, "Creator": "rca"})
    return out.getvalue()


def limit_line(axes: Axes, value: float, name: str, *, colour: str = GREY) -> None:
    """A horizontal limit with its name on the line."""
    axes.axhline(value, color=colour, linewidth=0.8, linestyle=(0, (4, 2)))
    axes.annotate(
        name,
        (1.0, value),
        xycoords=("axes fraction", "data"),
        xytext=(-2, 2),
        textcoords="offset points",
        ha="right",
        va="bottom",
        color=colour,
        fontsize=7.5,
    )
