"""How every plot looks, and how it becomes bytes.

What a mark means is carried by its shape, fill and thickness; the two colours
only repeat it, and differ in grey print too.
"""

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from io import BytesIO
from typing import Any, Final, Literal, TypeAlias

import matplotlib as mpl
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.typing import RcKeyType

from coldwork.plots.columns import FloatArray
from coldwork.plots.names import FONT

__all__ = [
    "BLUE",
    "FAINT",
    "GREY",
    "INK",
    "PAPER",
    "RED",
    "SMALL",
    "Dashes",
    "Mark",
    "Sizes",
    "house",
    "save",
]

INK: Final = "#111111"
GREY: Final = "#5a5a5a"
FAINT: Final = "#d4d4d4"
PAPER: Final = "#ffffff"
BLUE: Final = "#0072b2"  # of a palette made for colour-blind eyes (Okabe and Ito 2008)
RED: Final = "#d55e00"
SMALL: Final = 0.4  # size of a mark in a crowd [1]
DOTS_PER_INCH: Final = 150


Dashes: TypeAlias = "Literal['-', 'none'] | tuple[float, tuple[float, ...]]"


class Sizes:
    """Font sizes, in points."""

    title: Final = 11.0
    axis: Final = 8.5
    words: Final = 8.0
    small: Final = 7.5


_SETTINGS: Final[dict[RcKeyType, Any]] = {
    "font.family": FONT,
    "font.size": Sizes.words,
    "text.parse_math": False,  # a `$` in a name is a dollar sign
    "axes.edgecolor": GREY,
    "axes.labelsize": Sizes.axis,
    "axes.linewidth": 0.6,
    "axes.unicode_minus": True,
    "axes.formatter.use_mathtext": False,
    "axes.axisbelow": True,
    "figure.dpi": DOTS_PER_INCH,
    "hatch.linewidth": 0.7,
    "legend.fontsize": Sizes.words,
    "legend.frameon": False,
    "savefig.dpi": DOTS_PER_INCH,
    "text.hinting": "none",
    "svg.fonttype": "path",  # text as outlines: the same on a machine without the font
    "svg.hashsalt": "coldwork",
    "xtick.color": GREY,
    "xtick.labelcolor": INK,
    "xtick.labelsize": Sizes.small,
    "xtick.major.width": 0.6,
    "ytick.color": GREY,
    "ytick.labelcolor": INK,
    "ytick.labelsize": Sizes.small,
    "ytick.major.width": 0.6,
}


@contextmanager
def house() -> Iterator[None]:
    """Hold matplotlib's own defaults and the house's settings, whatever the user's file says."""
    with mpl.rc_context():
        mpl.rcdefaults()
        mpl.rcParams.update(_SETTINGS)
        yield


@dataclass(frozen=True)
class Mark:
    """One kind of point: the same in a plot and in its key.

    Attributes
    ----------
    shape : str
        Matplotlib's marker.
    size : float
        Its size. [pt]
    face, edge : str
        Colours of its inside and its outline.
    width : float
        Thickness of the outline. [pt]
    """

    shape: str
    size: float
    face: str = INK
    edge: str = INK
    width: float = 0.8

    def put(
        self,
        axes: Axes,
        x: FloatArray,
        y: FloatArray,
        *,
        raster: bool = False,
        scale: float = 1.0,
    ) -> None:
        """Draw it at every place given, as pixels and smaller where there are many."""
        if len(x):
            axes.plot(
                x,
                y,
                linestyle="",
                marker=self.shape,
                markersize=self.size * scale,
                markerfacecolor=self.face,
                markeredgecolor=self.edge,
                markeredgewidth=self.width * scale,
                rasterized=raster,
                clip_on=raster,
                zorder=3,
            )

    def sample(self, line: float = 0.0, dashes: Dashes = "-", colour: str | None = None) -> Line2D:
        """Make its sample for a key, on a line that is so many points thick."""
        return Line2D(
            [],
            [],
            color=colour or self.edge,
            linewidth=line,
            linestyle=dashes if line else "none",
            solid_capstyle="butt",
            dash_capstyle="butt",
            marker=self.shape,
            markersize=self.size,
            markerfacecolor=self.face,
            markeredgecolor=self.edge,
            markeredgewidth=self.width,
        )


def save(figure: Figure, stem: str) -> tuple[bytes, bytes]:
    """Render a figure; the same figure gives the same bytes every time.

    Parameters
    ----------
    figure : Figure
        One of `draw_all`.
    stem : str
        Its file name without ending; the SVG is titled with it where the
        figure has no label of its own.

    Returns
    -------
    tuple of bytes
        The SVG and the PNG, without date and without program version.
    """
    title = str(figure.get_label()) or stem
    vector, raster = BytesIO(), BytesIO()
    with house():
        canvas = FigureCanvasAgg(figure)
        canvas.print_figure(
            raster,
            format="png",
            metadata={"Software": None, "Title": title},
            pil_kwargs={"compress_level": 5},
        )
        canvas.print_figure(
            vector, format="svg", metadata={"Date": None, "Creator": None, "Title": title}
        )
    return vector.getvalue(), raster.getvalue()
