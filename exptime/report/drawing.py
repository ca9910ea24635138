"""How figures are drawn: one size, one palette, and the same file from the same numbers."""

from __future__ import annotations

import io
import re
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from html import escape
from typing import TYPE_CHECKING, Any, Final

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.axis import Axis
    from matplotlib.figure import Figure

# The colours stand for variables of the page, which has one set for light and one for dark
# paper. They differ in hue for every kind of colour vision and in lightness for grey print;
# lines differ in their dashes as well.
INK: Final = "#20262b"
FAINT: Final = "#8b9399"
COLORS: Final = ("#0b5c8a", "#a5580c", "#7d3c7e", "#4d7a33")
DASHES: Final[tuple[str | tuple[int, tuple[float, ...]], ...]] = (
    "-",
    (0, (6.0, 2.0)),
    (0, (1.5, 1.5)),
    (0, (6.0, 2.0, 1.5, 2.0)),
)
VARIABLES: Final = {
    INK: "--ink",
    FAINT: "--faint",
    **{color: f"--line-{number}" for number, color in enumerate(COLORS, 1)},
}

_WIDTH_IN: Final = 5.2
_SETTINGS: Final[dict[Any, Any]] = {
    "svg.fonttype": "none",
    "font.family": "sans-serif",
    "font.size": 10.2,
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "axes.linewidth": 0.7,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "lines.linewidth": 1.6,
    "axes.unicode_minus": True,
    "path.simplify": True,
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Picture:
    """A figure ready for a page.

    Parameters
    ----------
    name : str
        Short name, which starts every id inside.
    svg : str
        An ``svg`` element for inline use; its colours are variables of the page.
    caption : str
        What is seen and how to read it.
    alternative : str
        The same for those who cannot see it.
    """

    name: str
    svg: str
    caption: str
    alternative: str


@contextmanager
def settings(name: str) -> Iterator[None]:
    """Hold the settings of figures while one is made, then restore the user's own."""
    import matplotlib

    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update({**_SETTINGS, "svg.hashsalt": f"exptime-{name}"})
        yield


def new_figure(height_in: float) -> Figure:
    """Return a figure with its own canvas, apart from any plotting session."""
    from matplotlib.backends.backend_svg import FigureCanvasSVG
    from matplotlib.figure import Figure

    figure = Figure(figsize=(_WIDTH_IN, height_in), layout="constrained")
    FigureCanvasSVG(figure)
    figure.patch.set_alpha(0.0)
    return figure


def picture(name: str, draw: Callable[[], Figure], *, caption: str, alternative: str) -> Picture:
    """Draw a figure and make it fit for a page.

    Parameters
    ----------
    name : str
        Short name.
    draw : callable
        Makes the figure.
    caption, alternative : str
        As in `Picture`.
    """
    with settings(name):
        stream = io.StringIO()
        draw().savefig(
            stream, format="svg", transparent=True, metadata={"Date": None, "Creator": None}
        )
    return Picture(
        name=name,
        svg=_inline(stream.getvalue(), name, alternative),
        caption=caption,
        alternative=alternative,
    )


def time_axis(axes: Axes, shortest_s: float, longest_s: float, only: float | None = None) -> None:
    """Make the horizontal axis one of exposure, in natural units; with one tick where asked."""
    from matplotlib.ticker import FixedLocator, FuncFormatter, NullFormatter

    from exptime.report.digits import duration

    axes.set_xscale("log")
    axes.set_xlim(shortest_s, longest_s)
    leading = ((1, 3), (1,)) if longest_s > 8.0 * shortest_s else ((1, 2, 5),)
    ticks = _steps(shortest_s, longest_s, leading, most=6) if only is None else [only]
    axes.xaxis.set_major_locator(FixedLocator(ticks))
    axes.xaxis.set_major_formatter(FuncFormatter(lambda time, _: duration(time)))
    axes.xaxis.set_minor_formatter(NullFormatter())
    axes.set_xlabel("good on-source time")


def legend_above(axes: Axes, columns: int) -> None:
    """Name the lines above the axes, where they cross nothing."""
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), frameon=False, ncols=columns)


def plain_log_axis(axis: Axis, low: float, high: float) -> None:
    """Label a logarithmic axis with plain numbers at 1, 2 and 5."""
    from matplotlib.ticker import FixedLocator, FuncFormatter, NullFormatter

    axis.set_major_locator(FixedLocator(_steps(low, high)))
    axis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
    axis.set_minor_formatter(NullFormatter())


def _steps(
    low: float,
    high: float,
    choices: tuple[tuple[int, ...], ...] = ((1, 2, 5), (1, 3), (1,)),
    most: int = 7,
) -> list[float]:
    """Return round numbers in a range of logarithms, thinned where they are many."""
    import numpy as np

    decades = range(int(np.floor(np.log10(low))) - 1, int(np.ceil(np.log10(high))) + 1)
    ticks: list[float] = []
    for leading in choices:
        ticks = [
            number * 10.0**decade
            for decade in decades
            for number in leading
            if low * 0.999 <= number * 10.0**decade <= high * 1.001
        ]
        if len(ticks) <= most:
            return ticks
    step = -(-len(ticks) // most)
    return ticks[::step]


def _inline(text: str, name: str, alternative: str) -> str:
    """Return the svg element alone, its ids and colours made fit for a page of several."""
    head, _, rest = text[text.index("<svg") :].partition(">")
    box = head.partition('viewBox="')[2].partition('"')[0]
    for useless in (r"<metadata>.*?</metadata>", r"<!--.*?-->", r"<style.*?</style>"):
        rest = re.sub(useless, "", rest, flags=re.DOTALL)
    rest = re.sub(r'\bid="([^"]+)"', rf'id="{name}-\1"', rest)
    rest = re.sub(r'xlink:href="#([^"]+)"', rf'href="#{name}-\1"', rest)
    rest = re.sub(r"url\(#([^)]+)\)", rf"url(#{name}-\1)", rest)
    # The page chooses the fonts; releases of matplotlib differ in how they name theirs.
    rest = re.sub(r"font: ([\d.]+px) [^;\"]+", r"font-size: \1", rest)
    rest = re.sub(r" ?font-family: [^;\"]+;?", "", rest)
    for color, variable in VARIABLES.items():
        rest = rest.replace(color, f"var({variable})")
    label = escape(alternative, quote=True)
    start = f'<svg viewBox="{box}" role="img" aria-label="{label}" class="figure">'
    return start + _without_spare_ids(rest).strip()


def _without_spare_ids(text: str) -> str:
    used = set(re.findall(r'href="#([^"]+)"', text)) | set(re.findall(r"url\(#([^)]+)\)", text))
    return re.sub(
        r' id="([^"]+)"', lambda found: found.group(0) if found.group(1) in used else "", text
    )
