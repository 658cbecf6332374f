"""Drawings of the chart library as layers of bytes: what rarely changes is drawn once and kept."""

from typing import Any

import numpy as np

DPI = 100
_MOST = 24  # layers kept: of 700 x 820 pixels, some 50 MB


def keep(kept: dict[Any, Any] | None, key: Any, made: Any) -> Any:
    """`made` is put among those kept, of which the oldest go."""
    if kept is not None:
        while len(kept) >= _MOST:
            del kept[next(iter(kept))]
        kept[key] = made
    return made


def blank(size: tuple[int, int], *, clear: bool) -> Any:
    """A figure of `size` (width, height) pixels on white, or on clear ground."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(figsize=(size[0] / DPI, size[1] / DPI), dpi=DPI, facecolor="white")
    if clear:
        figure.patch.set_alpha(0.0)
    FigureCanvasAgg(figure)
    return figure


def bytes_of(figure: Any) -> Any:
    """(height, width, 4) red, green, blue and opacity."""
    figure.canvas.draw()
    return np.asarray(figure.canvas.buffer_rgba()).copy()


def laid_over(below: Any, above: Any) -> Any:
    """Two layers (height, width, 4) as one."""
    out = below.copy()
    drawn = above[:, :, 3] > 0
    top, ground = above[drawn].astype(np.float32), below[drawn].astype(np.float32)
    share = top[:, 3:] / 255
    rest = ground[:, 3:] / 255 * (1 - share)
    opacity = share + rest
    out[drawn, :3] = np.rint((top[:, :3] * share + ground[:, :3] * rest) / opacity)
    out[drawn, 3] = np.rint(255 * opacity[:, 0])
    return out
