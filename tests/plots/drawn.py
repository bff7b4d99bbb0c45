"""What stands on a drawn figure: words and where, marks and how they look."""

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from functools import cache, wraps
from typing import Any

import numpy as np
import pytest
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle
from matplotlib.text import Text
from matplotlib.transforms import Bbox
from numpy.typing import NDArray
from tests.plots.frames import Batch, awkward, batch, flow

from coldwork.plots import draw_all
from coldwork.plots.style import house

CASES: dict[str, Callable[[], Batch]] = {
    "1": lambda: batch(1),
    "5": lambda: batch(5),
    "35": lambda: batch(35),
    "200, strains": lambda: batch(200).without("readings", "scatter", "budget", "decisions"),
    "5 odd": lambda: batch(5, odd=True, strains=False),
    "9 odd": lambda: batch(9, odd=True, strains=False, timed=False, testers=(), operators=()),
    "200 odd": lambda: batch(200, odd=True, strains=False, testers=("T1",)),
    "700, no names": lambda: batch(700, conditions=False, strains=False),
    "awkward": awkward,
    "flow": flow,
}


@dataclass(frozen=True)
class Word:
    """A text as drawn: in pixels, corners (left, bottom, right, top)."""

    text: str
    box: tuple[float, float, float, float]


@dataclass(frozen=True)
class Sheet:
    """A figure that was drawn once, with its words."""

    stem: str
    figure: Figure
    words: list[Word]

    @property
    def texts(self) -> list[str]:
        return [word.text for word in self.words]

    @property
    def legend(self) -> Bbox:
        with house():
            renderer = FigureCanvasAgg(self.figure).get_renderer()  # type: ignore[no-untyped-call]
            return self.figure.legends[0].get_window_extent(renderer)


@cache
def sheets(case: str) -> tuple[Sheet, ...]:
    """Draw a case once for all tests that look at it."""
    made = CASES[case]()
    return tuple(drawn(stem, figure) for stem, figure in draw_all(made.frames, made.context))


def drawn(stem: str, figure: Figure) -> Sheet:
    """Draw a figure and note every text that was really put on it."""
    words: list[Word] = []
    with _noting(words), house():
        FigureCanvasAgg(figure).draw()  # type: ignore[no-untyped-call]
    return Sheet(stem, figure, words)


@contextmanager
def _noting(words: list[Word]) -> Iterator[None]:
    original = Text.draw

    @wraps(original)
    def noting(self: Text, renderer: Any, *rest: Any, **named: Any) -> None:  # noqa: ANN401
        original(self, renderer, *rest, **named)
        if self.get_visible() and self.get_text():
            box = self.get_window_extent(renderer)
            words.append(Word(self.get_text(), (box.x0, box.y0, box.x1, box.y1)))

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Text, "draw", noting)
        yield


def clashes(words: list[Word]) -> list[tuple[str, str]]:
    """Give the pairs of texts that stand on each other by more than a pixel either way."""
    boxes = np.array([word.box for word in words])
    wide = np.minimum(boxes[:, None, 2], boxes[:, 2]) - np.maximum(boxes[:, None, 0], boxes[:, 0])
    high = np.minimum(boxes[:, None, 3], boxes[:, 3]) - np.maximum(boxes[:, None, 1], boxes[:, 1])
    on = np.triu((wide > 1.0) & (high > 2.0), k=1)
    return [(words[i].text, words[j].text) for i, j in zip(*np.nonzero(on), strict=True)]


def data_of(axes: Axes) -> NDArray[np.float64]:
    """Give the places of all marks and line ends of a panel, shape (n, 2). [data]"""
    lines = (line.get_xydata() for line in axes.lines)
    places = [np.asarray(xy, dtype=np.float64).reshape(-1, 2) for xy in lines]
    for collection in axes.collections:
        places += [np.asarray(path.vertices, np.float64) for path in collection.get_paths()]
    bars = (patch for patch in axes.patches if isinstance(patch, Rectangle))
    places += [np.asarray(bar.get_bbox().corners(), np.float64) for bar in bars]
    return np.concatenate(places) if places else np.empty((0, 2))
