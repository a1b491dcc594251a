"""A small writer of PDF pages (ISO 32000-1), for charts drawn in ways that no plotting library draws."""

import io
import zlib

import numpy as np

KAPPA = 4 / 3 * (np.sqrt(2) - 1)  # control arm of a quarter circle by one cubic


def pdf_file(content, *, size=(400.0, 400.0), page="", resources="", objects=(), trailer=""):
    """Bytes of a PDF with one page, or one a member when `content` is a list; `objects` are numbered from 10.

    content : str or list of str; size : points; page : more page entries; objects : bytes of further objects
    """
    contents = [content] if isinstance(content, str) else list(content)
    numbered = {1: b"<< /Type /Catalog /Pages 2 0 R >>"}
    kids, number = [], 10 + len(objects)
    for k, item in enumerate(objects):
        numbered[10 + k] = item
    for item in contents:
        kids.append(f"{number} 0 R")
        numbered[number] = (
            f"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 {size[0]} {size[1]}] /Contents {number + 1} 0 R "
            f"/Resources << /Font << /F1 3 0 R >> {resources} >> {page} >>"
        ).encode()
        numbered[number + 1] = stream(item.encode("latin-1"))
        number += 2
    numbered[2] = f"<< /Type /Pages /Kids [{' '.join(kids)}] /Count {len(kids)} >>".encode()
    numbered[3] = b"<< /Type /Font /Subtype /Type1 /BaseFont /Helvetica /Encoding /WinAnsiEncoding >>"
    out, offsets = b"%PDF-1.7\n", {}
    for n in sorted(numbered):
        offsets[n] = len(out)
        out += b"%d 0 obj\n" % n + numbered[n] + b"\nendobj\n"
    start = len(out)
    out += b"xref\n0 1\n0000000000 65535 f \n"
    for n, offset in offsets.items():
        out += b"%d 1\n%010d 00000 n \n" % (n, offset)
    return out + f"trailer << /Size {number} /Root 1 0 R {trailer} >>\nstartxref\n{start}\n%%EOF\n".encode()


def stream(data, entries=""):
    """An object with a stream."""
    return f"<< /Length {len(data)} {entries} >>\nstream\n".encode() + data + b"\nendstream"


def form(content, matrix=(1, 0, 0, 1, 0, 0), box=(-2000, -2000, 2000, 2000)):
    """A form XObject."""
    numbers = " ".join(f"{v:g}" for v in matrix)
    return stream(
        content.encode("latin-1"),
        f"/Type /XObject /Subtype /Form /BBox [{' '.join(map(str, box))}] /Matrix [{numbers}] "
        "/Resources << /Font << /F1 3 0 R >> >>",
    )


def bitmap(rgb, *, jpeg=False):
    """An image XObject of (h, w, 3) uint8."""
    height, width = rgb.shape[:2]
    entries = f"/Type /XObject /Subtype /Image /Width {width} /Height {height} "
    entries += "/ColorSpace /DeviceRGB /BitsPerComponent 8 "
    if jpeg:
        from PIL import Image

        store = io.BytesIO()
        Image.fromarray(rgb).save(store, "JPEG", quality=90)
        return stream(store.getvalue(), entries + "/Filter /DCTDecode")
    return stream(zlib.compress(rgb.tobytes()), entries + "/Filter /FlateDecode")


def curve_circle(x, y, radius):
    """A circle of four Bezier arcs."""
    k = KAPPA * radius
    corners = [(radius, 0), (0, radius), (-radius, 0), (0, -radius)]
    out = f"{x + radius:.4f} {y:.4f} m\n"
    for (ax, ay), (bx, by) in zip(corners, corners[1:] + corners[:1], strict=True):
        tx, ty = -ay / radius * k, ax / radius * k
        ux, uy = by / radius * k, -bx / radius * k
        points = (x + ax + tx, y + ay + ty, x + bx + ux, y + by + uy, x + bx, y + by)
        out += " ".join(f"{v:.4f}" for v in points) + " c\n"
    return out + "h S\n"


def chord_circle(x, y, radius, n=180, part=(0.0, 360.0)):
    """A circle, or the part of it from one page angle to another, of n straight chords."""
    whole = part[1] - part[0] >= 360
    deg = np.linspace(*part, n + 1)[: n if whole else n + 1]
    return line(x + radius * np.sin(np.radians(deg)), y + radius * np.cos(np.radians(deg)), close=whole)


def dash_circle(x, y, radius, n=60):
    """A circle of n separate straight strokes."""
    out = ""
    for deg in np.arange(n) * 360 / n:
        a = np.radians([deg, deg + 200 / n])
        out += line(x + radius * np.sin(a), y + radius * np.cos(a))
    return out


def line(x, y, *, close=False, paint="S", digits=4):
    """A path through points."""
    points = [
        f"{a:.{digits}f} {b:.{digits}f} {'l' if k else 'm'}"
        for k, (a, b) in enumerate(zip(x, y, strict=True))
    ]
    return "\n".join(points) + (" h " if close else " ") + paint + "\n"


def spokes(x, y, radius, step=30.0, first=0.0):
    """Lines from the centre to the rim."""
    out = ""
    for deg in np.arange(first, 360, step):
        a = np.radians(deg)
        out += line([x, x + radius * np.sin(a)], [y, y + radius * np.cos(a)])
    return out


def text(x, y, words, size=8.0, *, turn_deg=0.0, mode=0):
    """Words with their lower left corner at a point."""
    c, s = np.cos(np.radians(turn_deg)), np.sin(np.radians(turn_deg))
    escaped = words.replace("(", r"\(").replace(")", r"\)")
    return (
        f"BT {mode} Tr /F1 {size} Tf {c:.5f} {s:.5f} {-s:.5f} {c:.5f} {x:.3f} {y:.3f} Tm ({escaped}) Tj ET\n"
    )


def polar(x, y, rho, page_deg):
    """x, y of points by radius (points) and page angle (clockwise from the top), y up."""
    return x + rho * np.sin(np.radians(page_deg)), y + rho * np.cos(np.radians(page_deg))
