"""A picture as SVG: the same bytes for the same picture, in any process, whatever matplotlib's settings."""

from __future__ import annotations

import io
import re
from functools import lru_cache
from threading import Lock
from typing import TYPE_CHECKING, Any
from xml.etree import ElementTree

from loadpath.figures.layout import WIDTH, Drawing, layout
from loadpath.figures.picture import Picture, describe, normal

if TYPE_CHECKING:
    from matplotlib.figure import Figure

BLACK = "#000000"
SVG = "http://www.w3.org/2000/svg"
FINE = 100
"""Units of the drawing in a point."""
SETTINGS: Any = {
    "svg.fonttype": "path",
    "svg.hashsalt": "loadpath",
    "lines.scale_dashes": False,
    "path.simplify_threshold": 1.0,
}
"""Of matplotlib, besides its defaults; a curve is simplified within a hundredth of a point."""
_LOCK = Lock()
"""matplotlib's settings are those of the whole process."""
_NOT_PRINTED = re.compile(
    "[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]|[\u202a-\u202e\u2066-\u2069]"
)
"""What XML can't hold, and what turns the direction of writing."""
_COMMAND = re.compile(r"([MLQCZ])([^MLQCZ]*)", re.IGNORECASE)


def svg(picture: Picture) -> bytes:
    """The picture as an SVG of its own (UTF-8), 165 mm wide; equal pictures are drawn once.

    `role="img"` and `aria-label` hold its `alt`. No fonts, ids, scripts, styles or references are needed.
    Raises ValueError for more than 12 curves, 20 000 points or 40 peaks, a text of more than 300
    characters, no curve or point at all, and an x or a peak that is not finite.
    """
    return _svg(normal(picture))


@lru_cache(maxsize=64)
def _svg(picture: Picture) -> bytes:
    import matplotlib

    drawn = io.BytesIO()
    with _LOCK, matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(SETTINGS)
        drawing = layout(picture)
        _figure(drawing).savefig(drawn, format="svg", metadata={"Date": None, "Creator": None})
    return _tidied(drawn.getvalue(), drawing.height, picture.alt or describe(picture))


def _figure(drawing: Drawing) -> Figure:
    """The drawing as a matplotlib figure in whole hundredths of a point: each a dot, at 72 dots an inch."""
    import numpy as np
    from matplotlib.figure import Figure
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path
    from matplotlib.transforms import IdentityTransform

    figure = Figure(figsize=(WIDTH * FINE / 72, drawing.height * FINE / 72), dpi=72)
    figure.patch.set_visible(False)

    def add(vertices: Any, codes: Any, **look: Any) -> None:
        path = Path(np.round(np.asarray(vertices) * FINE), codes)
        figure.add_artist(PathPatch(path, transform=IdentityTransform(), clip_on=False, **look))

    for line in drawing.lines:
        dashes: Any = (0, tuple(length * FINE for length in line.dashes)) if line.dashes else "solid"
        look = {"linewidth": line.weight * FINE, "linestyle": dashes, "joinstyle": "round"}
        add(line.points, None, fill=False, edgecolor=BLACK, capstyle="butt", **look)
    for middle, radius in drawing.dots:
        circle = Path.circle(middle, radius)
        add(circle.vertices, circle.codes, facecolor=BLACK, linewidth=0)
    for text in drawing.texts:
        if len(text.outline.codes):
            vertices = text.outline.vertices + np.array([text.x, text.y])
            add(vertices, text.outline.codes, facecolor=BLACK, linewidth=0)
    return figure


# --- tidying ------------------------------------------------------------------------------------------------


def _tidied(drawn: bytes, height: float, alt: str) -> bytes:
    """Only the paths, with their look as attributes: in a page it must not style or name anything else."""
    view = f"0 0 {WIDTH * FINE:.0f} {height * FINE:.0f}"
    size = {"width": f"{WIDTH:g}pt", "height": f"{height:g}pt", "viewBox": view}
    label = _NOT_PRINTED.sub("\ufffd", alt)
    root = ElementTree.Element("svg", {"xmlns": SVG, **size, "role": "img", "aria-label": label})
    root.text = "\n"
    for path in ElementTree.fromstring(drawn).iter(f"{{{SVG}}}path"):
        look = dict(part.strip().split(": ") for part in path.get("style", "").split(";") if part.strip())
        ElementTree.SubElement(root, "path", {"d": _short(path.get("d", "")), **look}).tail = "\n"
    return ElementTree.tostring(root, encoding="unicode").encode() + b"\n"


def _short(path: str) -> str:
    """The same path in whole numbers relative to the place before."""
    parts: list[str] = []
    x = y = start_x = start_y = 0
    for command, numbers in _COMMAND.findall(path):
        places = [round(float(number)) for number in numbers.split()]
        if command == "Z":
            x, y = start_x, start_y
        relative = [v - (y if i % 2 else x) for i, v in enumerate(places)]
        parts.append(command.lower() + " ".join(map(str, relative)).replace(" -", "-"))
        if places:
            x, y = places[-2:]
        if command == "M":
            start_x, start_y = x, y
    return "".join(parts)
