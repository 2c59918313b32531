"""Differences against the mean of both procedures: where they lie, what is allowed, what single results do."""

from __future__ import annotations

import numpy as np
from reportlab.graphics.shapes import Drawing

from labstat.report.axes import ACCENT, INK, SHADE, SOFT, Axes, linear_scale, log_scale
from labstat.report.fonts import register
from labstat.report.plot_parts import KeyEntry, crowded, key, level_marks, specimen_names, wide_range, with_unit
from labstat.round.model import AnalytePlan
from labstat.study.results import ComparisonResult


def difference_plot(result: ComparisonResult, analyte: AnalytePlan, *, width: float, height: float) -> Drawing:
    """Candidate minus comparative, in units or in percent of the mean, with mean and limits of agreement."""
    register()
    drawing = Drawing(width, height)
    data = result.data
    percent = result.difference is not None and result.difference.scale == "percent"
    middle = (data.x + data.y) / 2.0
    with np.errstate(divide="ignore", invalid="ignore"):
        d = 100.0 * (data.y - data.x) / middle if percent else data.y - data.x
    # a level outside the specimens has no place in the figure, so its allowance must not stretch the axis
    reach = float(middle.min()), float(middle.max())
    allowed = [item for item in _allowed(result, percent=percent) if reach[0] <= item[0] <= reach[1]]
    values = [float(v) for v in d if np.isfinite(v)] + [edge for _, *edges in allowed for edge in edges] + [0.0]
    agreed = result.difference
    if agreed is not None:
        values += [agreed.lower.estimate, agreed.upper.estimate]
    xs = [float(v) for v in middle]
    axes = Axes(
        drawing, left=40, bottom=50, right=width - 62, top=height - 16,
        x=log_scale(xs) if wide_range(result) else linear_scale(xs), y=linear_scale(values, room=0.08),
    )
    unit = "% of the mean" if percent else analyte.unit
    if agreed is not None and agreed.mean.low is not None and agreed.mean.high is not None:
        axes.rectangle(axes.xs.low, agreed.mean.low, axes.xs.high, agreed.mean.high, fill=SHADE)
    axes.frame(
        x_title=with_unit("Mean of both procedures", analyte.unit),
        y_title=with_unit(f"{data.candidate} minus {data.comparative}", unit), y_ticks=6,
    )
    if crowded([item[0] for item in allowed]):
        edges = sorted(allowed)
        for side in (1, 2):
            axes.curve([item[0] for item in edges], [item[side] for item in edges], colour=INK, wide=1.2)
        allowed_bars = []
    else:
        allowed_bars = allowed
    for at, low, high in allowed_bars:
        x, top = axes.at(at, high)
        bottom = axes.at(at, low)[1]
        if axes.left <= x <= axes.right:
            axes.segment(at, low, at, high, colour=INK, wide=1.4)
            for y in (bottom, top):
                if axes.bottom <= y <= axes.top:
                    axes.rule(x - 7, y, x + 7, y, INK, 1.2)
    level_marks(axes, [level.level.at for level in result.levels])
    axes.segment(axes.xs.low, 0.0, axes.xs.high, 0.0, colour=SOFT, wide=0.8, dash=(4, 2.5))
    _agreement(axes, result)
    flagged = {outlier.specimen for outlier in result.outliers}
    axes.dots([
        (float(x), float(y), specimen in flagged)
        for specimen, x, y in zip(data.specimens, middle, d, strict=True) if np.isfinite(y)
    ])
    places = {specimen: i for i, specimen in enumerate(data.specimens)}
    specimen_names(
        axes,
        [(o.specimen, float(middle[places[o.specimen]]), float(d[places[o.specimen]])) for o in result.outliers],
    )
    entries: list[KeyEntry] = [
        ("mean difference", ACCENT, 1.3, None), ("its interval", SHADE, 5.0, None),
        ("limits of agreement (95 % of differences)", ACCENT, 0.9, (5, 2)), ("no difference", SOFT, 0.8, (4, 2.5)),
    ]
    if allowed:
        entries.append(("allowed bias at the level", INK, 1.4, None))
    key(drawing, entries, left=40, bottom=19, right=width)  # room for three rows
    return drawing


def _allowed(result: ComparisonResult, *, percent: bool) -> list[tuple[float, float, float]]:
    """Allowed bias at each level, in the scale of the figure."""
    found = []
    for item in result.levels:
        if item.level.allowable is None or (percent and item.level.at == 0.0):
            continue
        low, high = item.level.allowable.at(item.level.at)
        factor = 100.0 / abs(item.level.at) if percent else 1.0
        found.append((item.level.at, low * factor, high * factor))
    return found


def _agreement(axes: Axes, result: ComparisonResult) -> None:
    agreed = result.difference
    if agreed is None:
        return
    low, high = axes.xs.low, axes.xs.high
    axes.segment(low, agreed.mean.estimate, high, agreed.mean.estimate, colour=ACCENT, wide=1.3)
    taken: list[float] = []
    for made, name in ((agreed.upper, "upper limit"), (agreed.mean, "mean"), (agreed.lower, "lower limit")):
        if name != "mean":
            axes.segment(low, made.estimate, high, made.estimate, colour=ACCENT, wide=0.9, dash=(5, 2))
        y = axes.at(low, made.estimate)[1]
        if made.low is not None and made.high is not None:
            bounds = [min(max(axes.at(low, v)[1], axes.bottom), axes.top) for v in (made.low, made.high)]
            axes.rule(axes.right + 4, bounds[0], axes.right + 4, bounds[1], ACCENT, 1.2)
        if all(abs(y - other) > 8 for other in taken):
            axes.text(axes.right + 9, y - 2.3, name, size=6.5, colour=SOFT)
            taken.append(y)

