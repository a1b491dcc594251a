"""Paint a page with matplotlib's Agg renderer on axes whose unit is one picture px."""

import numpy as np

from .fonts import font_file
from .spec import Text
from .strokes import Area, strokes_of

DPI = 100
POINTS_PER_PX = 72 / DPI


def paint(page):
    """Exact area coverage; horizontal and vertical lines are snapped to whole pixels, as the program does.

    Its thinning of long paths is off: that moves a circle inward by 0.02 px, which is no part of the truth.
    """
    import matplotlib as mpl
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure
    from matplotlib.font_manager import FontProperties

    with mpl.rc_context({"path.simplify": False}):
        figure = Figure(figsize=(page.width / DPI, page.height / DPI), dpi=DPI, facecolor=page.paper)
        canvas = FigureCanvasAgg(figure)
        axes = figure.add_axes((0, 0, 1, 1))
        axes.set_axis_off()
        axes.set_xlim(-0.5, page.width - 0.5)
        axes.set_ylim(page.height - 0.5, -0.5)
        for order, op in enumerate(strokes_of(page)):
            if isinstance(op, Text):
                axes.text(
                    op.x,
                    op.y,
                    op.text.replace("$", r"\$"),
                    fontproperties=FontProperties(fname=font_file(op.family), size=op.size * POINTS_PER_PX),
                    color=op.colour,
                    ha="left" if op.anchor == "lm" else "center",
                    va="center",
                    rotation=-op.turn_deg,
                    rotation_mode="default",
                    zorder=order,
                    bbox={"facecolor": op.box, "edgecolor": "none", "pad": 1} if op.box else None,
                )
            elif isinstance(op, Area):
                axes.fill(*op.points.T, color=op.colour, alpha=op.opacity, linewidth=0, zorder=order)
            else:
                points = np.vstack([op.points, op.points[:2]]) if op.closed else op.points
                axes.plot(
                    *points.T,
                    color=op.colour,
                    linewidth=op.width * POINTS_PER_PX,
                    solid_capstyle="butt",
                    solid_joinstyle="round",
                    zorder=order,
                )
        canvas.draw()
    return np.asarray(canvas.buffer_rgba())[..., :3].copy()
