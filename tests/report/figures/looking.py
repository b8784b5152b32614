"""What a reader would see of a figure: its texts and where they stand, its numbers, its greys."""

import csv
from itertools import combinations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.colors import to_rgb


def texts_of(figure):
    """Return every text that is drawn, tick labels outside the view left out."""
    figure.draw(figure.canvas.get_renderer())  # ticks get their text when they are drawn
    found = [*figure.texts, *(t for legend in figure.legends for t in legend.get_texts())]
    for axes in figure.axes:
        found += [axes.title, axes.xaxis.label, axes.yaxis.label, *axes.texts]
        for axis in (axes.xaxis, axes.yaxis):
            found.append(axis.get_offset_text())
            low, high = sorted(axis.get_view_interval())
            for tick in axis.get_major_ticks():
                if low <= tick.get_loc() <= high:
                    found += [tick.label1, tick.label2]
    return [text for text in found if text.get_visible() and text.get_text().strip()]


def boxes_of(figure):
    """Return (text, box in pixels) of every text that is drawn."""
    renderer = figure.canvas.get_renderer()
    return [(text.get_text(), text.get_window_extent(renderer)) for text in texts_of(figure)]


def outside(figure):
    """Return the texts that leave the canvas."""
    width, height = figure.canvas.get_width_height()
    return [
        text for text, box in boxes_of(figure)
        if box.x0 < 0 or box.y0 < 0 or box.x1 > width or box.y1 > height
    ]  # fmt: skip


def overlapping(figure, slack=0.5):
    """Return the pairs of texts that cover each other by more than `slack` pixels."""
    return [
        (one, two) for (one, a), (two, b) in combinations(boxes_of(figure), 2)
        if min(a.x1, b.x1) - max(a.x0, b.x0) > slack and min(a.y1, b.y1) - max(a.y0, b.y0) > slack
    ]  # fmt: skip


def plotted_numbers(figure, *, y=True):
    """Return every number that stands in data coordinates; with ``y=False`` only the x ones."""
    found = []
    for axes in figure.axes:
        for line in axes.get_lines():
            if line.get_transform() == axes.transData:
                found += [*line.get_xdata(), *(line.get_ydata() if y else ())]
        for band in axes.collections:
            for path in band.get_paths():
                found += [*path.vertices[:, 0], *(path.vertices[:, 1] if y else ())]
    return np.unique(np.asarray(found, dtype=float))


def missing(values, path):
    """Return the values that no field of a CSV holds."""
    with path.open(newline="", encoding="utf-8") as file:
        rows = list(csv.reader(file))[1:]
    known = np.sort([float(f) for row in rows for f in row if is_number(f)])
    values = values[np.isfinite(values)]
    at = np.clip(np.searchsorted(known, values), 1, len(known) - 1)
    nearest = np.minimum(np.abs(known[at] - values), np.abs(known[at - 1] - values))
    return values[nearest > 1e-9 * np.maximum(np.abs(values), 1)]


def is_number(text):
    try:
        return np.isfinite(float(text))
    except ValueError:
        return False


def grey(color):
    """Return the lightness of a colour printed in grey (ITU-R BT.601 luma), 0 to 1."""
    return float(np.dot(to_rgb(color), [0.299, 0.587, 0.114]))


def looks(axes: Axes):
    """Return pattern and marker of every named line of a panel, colour left out."""
    lines = [line for line in axes.get_lines() if not line.get_label().startswith("_")]
    return [(str(line._unscaled_dash_pattern), str(line.get_marker())) for line in lines]
