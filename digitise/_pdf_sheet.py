"""A sheet of paper as a PDF page drawn with lines and letters (ISO 32000-1), a unit for a px of the layout.

Only what the proof needs: a pen that answers the calls of Pillow's, panels whose masks are drawn as lines,
bitmaps, and the font of the other proofs laid into the file, so that words stand where the layout measured
them.
"""

import itertools
import zlib

import numpy as np

from ._proof_panel import MARKER_PX, THIN_PX, Mask
from ._proof_text import ALSO_THERE, font

__all__ = ["LinePanel", "PdfPen", "pdf_bytes"]

A4_PT = 595.276, 841.89  # ISO 216: 210 x 297 mm
EDGE_PT = 20.0
LETTERS = "".join(chr(k) for k in range(32, 127)) + ALSO_THERE  # at their own codes in WinAnsiEncoding
NAME = "ProofText"  # of the font, inside the file
BROADER_PX = 0.5  # a mask's lines come out so much broader in pixels
EM = 1000  # units of a font's measures


class LinePanel:
    """A panel of lines in place of an array of px: paper or a bitmap, and what masks lay on it."""

    def __init__(self, width, height, paper, *, bitmap=None):
        self.shape = (height, width, 3)
        self.paper = paper
        self.bitmap = bitmap
        self.commands = []
        self.opacities = set()

    def mask(self):
        """A new mask of this panel."""
        return _LineMask(self)


class _LineMask:
    """What one colour is laid on with, as lines; answers the calls of `_proof_panel.Mask`."""

    cross = Mask.cross

    def __init__(self, panel):
        self.panel = panel
        self.strokes, self.areas = {}, []

    def line(self, path, width_px):
        """A line through the points of `path`, (x, y) arrays."""
        self.strokes.setdefault(float(width_px), []).append(_path(np.stack(path, axis=1)) + " S")

    def circle(self, place):
        """A small open circle."""
        self.strokes.setdefault(THIN_PX, []).append(_circle(*place, MARKER_PX) + " S")

    def triangle(self, place):
        """A small filled triangle that points down."""
        self.areas.append(place + MARKER_PX * np.array([[-1.1, -1.0], [1.1, -1.0], [0.0, 1.2]]))

    def quads(self, corners):
        """Filled convex areas, (n, 4, 2)."""
        self.areas.extend(corners)

    def lay(self, colour, strength=1.0):
        """Draw what was gathered in a colour, each px of it once however the parts overlap."""
        out = self.panel.commands
        self.panel.opacities.add(round(strength, 3))
        out.append(f"q {_opacity(strength)} gs {_colour(colour)} RG {_colour(colour)} rg 1 J 1 j")
        if self.areas:  # as one path, all the same way round: overlaps are filled once
            out.append("\n".join(_path(_one_way(area)) + " h" for area in self.areas) + " f")
        for width, paths in self.strokes.items():
            out.append(f"{width + BROADER_PX:.2f} w " + "\n".join(path[:-2] for path in paths) + " S")
        out.append("Q")


class PdfPen:
    """The calls of Pillow's pen that the layout makes, gathered as a page's content; y grows downward."""

    def __init__(self):
        self.commands, self.bitmaps, self.opacities = [], [], {1.0}

    def text(self, place, words, *, font, fill, anchor="la", stroke_width=0, stroke_fill=None):
        """A line of words; a stroke of twice the width under it is its halo."""
        x, y = float(place[0]), float(place[1])
        x -= {"l": 0.0, "m": 0.5, "r": 1.0}[anchor[0]] * font.getlength(words)
        ascent, descent = font.getmetrics()
        y += {"a": ascent, "m": (ascent - descent) / 2}[anchor[1]]
        shown = f"BT /F1 {font.size:g} Tf 1 0 0 -1 {x:.2f} {y:.2f} Tm <{words.encode('cp1252').hex()}> Tj ET"
        if stroke_width:
            halo = f"q {_colour(stroke_fill)} RG {2 * stroke_width:g} w 1 j 1 Tr"
            self.commands.append(f"{halo} {shown} Q")
        self.commands.append(f"{_colour(fill)} rg {shown}")

    def rectangle(self, box, *, outline):
        """The outline of a box whose corners are px."""
        left, top, right, bottom = box
        place = f"{left + 0.5:.2f} {top + 0.5:.2f} {right - left:.2f} {bottom - top:.2f}"
        self.commands.append(f"{_colour(outline)} RG 1 w {place} re S")

    def ellipse(self, box, *, outline, width):
        """The outline of a circle in a box."""
        left, top, right, bottom = box
        radius = (right - left) / 2 - width / 2
        middle = (left + right) / 2 + 0.5, (top + bottom) / 2 + 0.5
        self.commands.append(f"{_colour(outline)} RG {width:g} w {_circle(*middle, radius)} S")

    def line(self, ends, *, fill):
        """A thin line between two px."""
        points = np.reshape(ends, (2, 2)) + 0.5
        self.commands.append(f"{_colour(fill)} RG 1 w {_path(points)} S")

    def panel(self, panel, x, y):
        """A `LinePanel` with its upper left px at a place."""
        height, width = panel.shape[:2]
        self.commands.append(f"q 1 0 0 1 {x} {y} cm 0 0 {width} {height} re W n")
        if panel.bitmap is None:
            self.commands.append(f"{_colour(panel.paper)} rg 0 0 {width} {height} re f")
        else:
            self.commands.append(f"q {width} 0 0 {-height} 0 {height} cm /I{len(self.bitmaps)} Do Q")
            self.bitmaps.append(panel.bitmap)
        # Masks have px centres at whole numbers.
        self.commands += ["1 0 0 1 0.5 0.5 cm", *panel.commands, "Q"]
        self.opacities |= panel.opacities


def pdf_bytes(pen, width, height, *, title):
    """A PDF of one A4 page, upright, that shows what a `PdfPen` drew on width x height px."""
    scale = min((A4_PT[0] - 2 * EDGE_PT) / width, (A4_PT[1] - 2 * EDGE_PT) / height)
    left, top = (A4_PT[0] - scale * width) / 2, A4_PT[1] - EDGE_PT
    content = f"{scale:.6f} 0 0 {-scale:.6f} {left:.3f} {top:.3f} cm\n" + "\n".join(pen.commands)
    first = 8
    images = " ".join(f"/I{k} {first + k} 0 R" for k in range(len(pen.bitmaps)))
    states = " ".join(f"{_opacity(v)} << /CA {v:g} /ca {v:g} >>" for v in sorted(pen.opacities))
    resources = f"/Font << /F1 4 0 R >> /ExtGState << {states} >> /XObject << {images} >>"
    paper = f"[0 0 {A4_PT[0]} {A4_PT[1]}]"
    page = f"/Type /Page /Parent 2 0 R /MediaBox {paper} /Contents 7 0 R /Resources << {resources} >>"
    objects = [
        b"<< /Type /Catalog /Pages 2 0 R >>",
        b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
        f"<< {page} >>".encode(),
        *_font_objects(),
        _stream(content.encode("ascii")),
        *(_image(bitmap) for bitmap in pen.bitmaps),
        b"<< /Title " + _words(title) + b" /Producer (digitise) >>",
    ]
    return _assembled(objects)


def _font_objects():
    """Objects 4 to 6: the font, its measures, and its file (ISO 32000-1, 9.6.3, 9.8 and 9.9)."""
    face = font(EM)
    rise, fall = face.getmetrics()
    widths = " ".join(str(round(face.getlength(chr(k))) if chr(k) in LETTERS else 0) for k in range(32, 256))
    encoding = "/Encoding /WinAnsiEncoding /FirstChar 32 /LastChar 255"
    measures = f"/FontBBox [{-EM} {-fall} {2 * EM} {rise}] /Ascent {rise} /Descent {-fall} /CapHeight {rise}"
    return (
        f"<< /Type /Font /Subtype /TrueType /BaseFont /{NAME} {encoding} /Widths [{widths}] "
        "/FontDescriptor 5 0 R >>".encode(),
        f"<< /Type /FontDescriptor /FontName /{NAME} /Flags 32 {measures} /ItalicAngle 0 /StemV 80 "
        "/FontFile2 6 0 R >>".encode(),
        _stream(face.font_bytes, f"/Length1 {len(face.font_bytes)}"),
    )


def _assembled(objects):
    """The file of numbered objects, the first the catalogue and the last the document's description."""
    out, places = bytearray(b"%PDF-1.4\n%\xe2\xe3\xcf\xd3\n"), []
    for number, data in enumerate(objects, 1):
        places.append(len(out))
        out += b"%d 0 obj\n" % number + data + b"\nendobj\n"
    start, count = len(out), len(objects) + 1
    out += b"xref\n0 %d\n0000000000 65535 f \n" % count
    out += b"".join(b"%010d 00000 n \n" % place for place in places)
    out += b"trailer\n<< /Size %d /Root 1 0 R /Info %d 0 R >>\n" % (count, count - 1)
    return bytes(out + b"startxref\n%d\n%%%%EOF\n" % start)


def _stream(data, entries=""):
    packed = zlib.compress(data, 6)
    head = f"<< /Filter /FlateDecode /Length {len(packed)} {entries} >>\nstream\n"
    return head.encode() + packed + b"\nendstream"


def _image(rgb):
    height, width = rgb.shape[:2]
    size = f"/Width {width} /Height {height} /ColorSpace /DeviceRGB /BitsPerComponent 8"
    return _stream(np.ascontiguousarray(rgb).tobytes(), f"/Type /XObject /Subtype /Image {size}")


def _words(text):
    """A text string with a byte order mark, so that any letter may stand in it (ISO 32000-1, 7.9.2.2)."""
    return b"<FEFF" + text.encode("utf-16-be", "replace").hex().upper().encode() + b">"


def _opacity(strength):
    return f"/O{round(1000 * strength)}"


def _colour(rgb):
    return " ".join(f"{min(max(float(v), 0.0), 255.0) / 255:.4g}" for v in rgb)


def _path(points):
    return " ".join(f"{x:.2f} {y:.2f} {'l' if k else 'm'}" for k, (x, y) in enumerate(points))


def _one_way(corners):
    """Corners in the order that goes round clockwise on the sheet."""
    x, y = np.asarray(corners, float).T
    return corners if np.dot(x, np.roll(y, -1)) - np.dot(y, np.roll(x, -1)) >= 0 else corners[::-1]


def _circle(x, y, radius):
    """A circle of four cubics, each 0.027 % off at most."""
    k = 4 / 3 * (np.sqrt(2) - 1) * radius
    out = f"{x + radius:.2f} {y:.2f} m"
    ends = [(radius, 0), (0, radius), (-radius, 0), (0, -radius), (radius, 0)]
    for (ax, ay), (bx, by) in itertools.pairwise(ends):
        control = (
            x + ax - ay * k / radius,
            y + ay + ax * k / radius,
            x + bx + by * k / radius,
            y + by - bx * k / radius,
        )
        out += " " + " ".join(f"{v:.2f}" for v in (*control, x + bx, y + by)) + " c"
    return out + " h"
