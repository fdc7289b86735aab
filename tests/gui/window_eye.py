"""What an eye finds on a window, and what the record says beside it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import (
    QPoint,
    QRect,
)
from window_tools import settle

from phasebrush.gui.pixel_image import PixelImage

if TYPE_CHECKING:
    from PySide6.QtGui import QImage
    from PySide6.QtWidgets import QWidget

    from phasebrush.gui.main_window import MainWindow
    from phasebrush.gui.time_plot import TimePlot


def trials_of(window: MainWindow, letter: str) -> list[int]:
    """Trials of a subset, as the record has them."""
    mask = window.workbench.state.subset(letter).mask
    return np.flatnonzero(mask).tolist()


def trials_of_rows(window: MainWindow, first: int, last: int) -> list[int]:
    """Trials that lie in these rows, both ends included."""
    return sorted(window.workbench.snapshot.rows.trial_of_row[first : last + 1].tolist())


def rows_drawn(view, letter: str) -> list[int]:
    """Rows that a view draws as picked."""
    return np.flatnonzero(view.brush.picked.rows[letter]).tolist()


def rows_meant(window: MainWindow, letter: str) -> list[int]:
    """Rows at which the trials of a subset lie."""
    rows = window.workbench.snapshot.rows.row_of_trial
    return sorted(rows[trials_of(window, letter)].tolist())


def area_in_window(plot: TimePlot) -> QRect:
    """The plot area in pixels of the window."""
    area = plot.plot_area().toAlignedRect()
    return QRect(plot.viewport().mapTo(plot.window(), area.topLeft()), area.size())


def exact_area_in_window(plot: TimePlot) -> tuple[float, float, float, float]:
    """Left, top, right and bottom of the plot area in the window, not rounded."""
    view_box = plot.getPlotItem().vb
    corners = plot.viewportTransform().mapRect(view_box.sceneBoundingRect())
    origin = plot.viewport().mapTo(plot.window(), QPoint(0, 0))
    return (
        corners.left() + origin.x(),
        corners.top() + origin.y(),
        corners.right() + origin.x(),
        corners.bottom() + origin.y(),
    )


def pixels(image: QImage) -> np.ndarray:
    """Colours of an image as 0xRRGGBB, shape (height, width)."""
    image = image.convertToFormat(image.Format.Format_RGB32)
    rows = np.frombuffer(image.constBits(), np.uint32).reshape(image.height(), -1)
    return (rows[:, : image.width()] & 0xFFFFFF).copy()


def seen(plot: TimePlot) -> np.ndarray:
    """Colours of a plot area as they stand on screen."""
    picture = plot.window().grab(area_in_window(plot)).toImage()
    return pixels(picture)


def time_range(view) -> tuple[float, float]:
    """Time range that a plot shows."""
    start, end = view.plot.getPlotItem().vb.viewRange()[0]
    return start, end


def cells(view) -> np.ndarray:
    """Numbers of colours of the lowest picture in a plot, row 0 at the foot."""
    items = view.plot.getPlotItem().items
    found = sorted((i for i in items if isinstance(i, PixelImage)), key=lambda i: i.zValue())
    assert found[0].isVisible()
    return found[0].cells


def time_views(window: MainWindow) -> tuple:
    """Every view whose horizontal axis is time."""
    views = window.docks.views
    return (
        window.bench.average,
        window.bench.stack,
        views.itc_map,
        views.power_map,
        views.itc_trace,
        views.power_trace,
    )


def named(parent: QWidget, kind: type, words: str):
    """The one control whose accessible name begins with these words."""
    found = [w for w in parent.findChildren(kind) if w.accessibleName().startswith(words)]
    assert len(found) == 1, f"{len(found)} controls named {words!r}"
    return found[0]


def lettered(parent: QWidget, kind: type, words: str):
    """The one button with this label."""
    found = [w for w in parent.findChildren(kind) if w.text() == words]
    assert len(found) == 1, f"{len(found)} buttons labelled {words!r}"
    return found[0]


def agree(window) -> None:
    """Both views draw the rows at which the record's trials lie."""
    settle(window)
    for view in (window.bench.stack, window.bench.strip):
        for letter in ("A", "B"):
            assert rows_drawn(view, letter) == rows_meant(window, letter), view.objectName()


def plots(window: MainWindow) -> dict:
    """Every view with a plot, by object name."""
    return {view.objectName(): view for view in (*time_views(window), window.bench.strip)}
