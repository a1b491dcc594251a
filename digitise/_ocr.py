"""Text detection and recognition by the models of an optional package, on this machine alone.

The package named in the extra `labels` ships two small networks in its wheel: one marks where text is (Liao
et al., Real-time scene text detection with differentiable binarization, AAAI 2020), one reads a line of it
and gives, for every column, the odds of every character (Graves et al., Connectionist temporal
classification, ICML 2006). They are run directly, because the odds are needed: a ring label is known to be a
number, so the reading is chosen among numbers.
"""

import os
import threading
from functools import lru_cache

import cv2
import numpy as np

from ._label_number import Alphabet

__all__ = ["Engine", "engine_name", "get_engine"]

PACKAGE = "rapidocr"
MAP_LEVEL = 0.3  # a pixel of the map counts as text above this
BOX_LEVEL = 0.5  # mean of the map over a box
GROW = 1.6  # the map marks shrunken text; a box grows by this times area over perimeter
LINE_PX = 48  # height that the recogniser reads
MIN_SIDE_PX = 3
BATCH = 12
WIDTHS = (
    64,
    96,
    128,
    192,
    320,
    480,
    768,
)  # px of a batch; few of them, so that the runtime reuses its memory
CHUNK = 32  # detector sizes are multiples of this
COLUMN_PX = 8  # px of a line, LINE_PX high, to a column of odds

_lock = threading.Lock()


def engine_name():
    """Name and version of the installed engine, "" when the extra is not installed."""
    from importlib import metadata, util

    if util.find_spec(PACKAGE) is None or util.find_spec("onnxruntime") is None:
        return ""
    try:
        return f"{PACKAGE} {metadata.version(PACKAGE)}"
    except metadata.PackageNotFoundError:
        return PACKAGE


def get_engine():
    """The process's `Engine`, made once; None when the extra is not installed."""
    with _lock:
        return _make_engine()


@lru_cache(maxsize=1)
def _make_engine():
    if not engine_name():
        return None
    from importlib import util

    folder = os.path.join(os.path.dirname(util.find_spec(PACKAGE).origin), "models")
    names = sorted(
        name for name in (os.listdir(folder) if os.path.isdir(folder) else ()) if name.endswith(".onnx")
    )
    detector = [name for name in names if "_det_" in name]
    reader = [name for name in names if "_rec_" in name]
    if not detector or not reader:
        return None
    return Engine(os.path.join(folder, detector[-1]), os.path.join(folder, reader[-1]))


class Engine:
    """Both networks, loaded. Not changed after it is made, so threads may share it."""

    line_px, column_px = LINE_PX, COLUMN_PX

    def __init__(self, detector_path, reader_path):
        import onnxruntime

        options = onnxruntime.SessionOptions()
        options.intra_op_num_threads = options.inter_op_num_threads = (
            1  # one core a chart; batches run in parallel
        )
        options.log_severity_level = 3

        def load(path):
            return onnxruntime.InferenceSession(path, options, providers=["CPUExecutionProvider"])

        self._detector, self._reader = load(detector_path), load(reader_path)
        listed = self._reader.get_modelmeta().custom_metadata_map["character"].split("\n")
        self.characters = ["", *listed, " "]  # class 0 is the blank between characters
        self.alphabet = Alphabet(self.characters)

    def detect(self, rgb, *, zoom=1.0):
        """Boxes of text on a picture: (n, 5) centre x, centre y, length, height (px) and turn (degrees
        clockwise).

        zoom : the picture is enlarged (or reduced) so much first
        """
        h, w = rgb.shape[:2]
        size = [max(CHUNK, round(side * zoom / CHUNK) * CHUNK) for side in (w, h)]
        scaled = cv2.resize(rgb, size, interpolation=cv2.INTER_AREA if zoom < 1 else cv2.INTER_CUBIC)
        heat = self._run(self._detector, scaled[None])[0, 0]
        boxes = [box for box in map(lambda c: _box_of(c, heat), _contours(heat)) if box is not None]
        if not boxes:
            return np.zeros((0, 5))
        boxes = np.array(boxes)
        fx, fy = w / size[0], h / size[1]
        boxes[:, 0], boxes[:, 1] = (boxes[:, 0] + 0.5) * fx - 0.5, (boxes[:, 1] + 0.5) * fy - 0.5
        boxes[:, 2:4] *= np.sqrt(fx * fy)
        return boxes

    def read(self, lines):
        """Log odds of characters along lines of text: a list of (columns, classes) arrays.

        lines : list of (h, w, 3) uint8 pictures, each one line of text, upright
        """
        out = [None] * len(lines)
        widths = [max(8, round(line.shape[1] * LINE_PX / line.shape[0])) for line in lines]
        order = np.argsort(widths, kind="stable")
        for start in range(0, len(order), BATCH):
            chosen = order[start : start + BATCH]
            wide = next((w for w in WIDTHS if w >= widths[chosen[-1]]), WIDTHS[-1])
            batch = np.full((len(chosen), LINE_PX, wide, 3), 127.5, np.float32)
            for row, k in zip(batch, chosen):
                width = min(widths[k], wide)
                smooth = cv2.INTER_AREA if lines[k].shape[0] > LINE_PX else cv2.INTER_CUBIC
                row[:, :width] = np.clip(
                    cv2.resize(lines[k].astype(np.float32), (width, LINE_PX), interpolation=smooth), 0, 255
                )
            for k, odds in zip(chosen, self._run(self._reader, batch)):
                out[k] = np.log(np.maximum(odds, 1e-9))
        return out

    @staticmethod
    def _run(session, batch):
        values = np.ascontiguousarray((batch.astype(np.float32) / 127.5 - 1).transpose(0, 3, 1, 2)[:, ::-1])
        return session.run(None, {session.get_inputs()[0].name: values})[0]


def _contours(heat):
    mask = cv2.dilate((heat > MAP_LEVEL).astype(np.uint8), np.ones((2, 2), np.uint8))
    return cv2.findContours(mask, cv2.RETR_LIST, cv2.CHAIN_APPROX_SIMPLE)[0]


def _box_of(contour, heat):
    """The grown box of one contour, or None when it is too small or too faint."""
    (x, y), (w, h), turn = cv2.minAreaRect(contour)
    if min(w, h) < MIN_SIDE_PX or _mean_over(contour, heat) < BOX_LEVEL:
        return None
    grow = w * h * GROW / (w + h)  # twice the offset area * ratio / perimeter
    if w < h:
        w, h, turn = h, w, turn + 90
    return x, y, w + grow, h + grow, (turn + 90) % 180 - 90


def _mean_over(contour, heat):
    x, y, w, h = cv2.boundingRect(contour)
    mask = np.zeros((h, w), np.uint8)
    cv2.fillPoly(mask, [contour - [x, y]], 1)
    return cv2.mean(heat[y : y + h, x : x + w], mask)[0]
