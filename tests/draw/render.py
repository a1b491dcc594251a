"""Choose a renderer: they differ in anti-aliasing, joints, caps, snapping and letters, as programs do."""

from . import matplotlib_pen, opencv_pen, pillow_pen

RENDERERS = {
    "pillow": pillow_pen.paint_smooth,
    "plain": pillow_pen.paint_plain,
    "matplotlib": matplotlib_pen.paint,
    "opencv": opencv_pen.paint,
    "opencv-fine": opencv_pen.paint_fine,
}


def paint(page, *, renderer="pillow"):
    """Paint a page as RGB (height, width, 3) uint8; `renderer` is one of `RENDERERS`.

    pillow : drawn several times larger and averaged down ; plain : no anti-aliasing, whole pixels
    matplotlib : its Agg renderer, exact area coverage, straight lines snapped to pixels
    opencv : anti-aliased lines with sub-pixel ends and whole widths, stroke letters ; opencv-fine : the same
    drawn larger and averaged down
    """
    return RENDERERS[renderer](page)
