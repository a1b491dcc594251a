"""Spoil a painted picture as copies are spoiled, and say where its points went."""

import io
from dataclasses import dataclass

import cv2
import numpy as np
from PIL import Image

from .fonts import rgb_of


@dataclass(frozen=True, eq=False, kw_only=True)
class Spoiled:
    """A spoiled picture.

    rgb : (h, w, 3) uint8 ; homography : (3, 3) from the painted picture ; suffix, quality : of the file
    inks : "kept", "black" or "grey"
    """

    rgb: np.ndarray
    homography: np.ndarray
    recipe: str
    suffix: str = "png"
    quality: int | None = None
    inks: str = "kept"

    def ink(self, colour):
        """Name the colour that an ink has become: black in a fax, its luma in a grey copy."""
        if self.inks == "black":
            return "#000000"
        if self.inks == "grey":
            level = round(float(np.dot(rgb_of(colour), (0.299, 0.587, 0.114))))
            return f"#{level:02x}{level:02x}{level:02x}"
        return colour

    def save_options(self):
        """Keywords for the picture's writer."""
        return {} if self.quality is None else {"quality": self.quality, "subsampling": 2}


def spoil(rgb, recipe, rng):
    """Spoil `rgb` by one of `RECIPES`, seeded by `rng`; returns `Spoiled`."""
    return RECIPES[recipe](rgb, rng, recipe)


def _paper(rgb):
    """Take the colour along the picture's top and bottom edge."""
    return tuple(int(v) for v in np.median(np.vstack([rgb[0], rgb[-1]]), axis=0))


def _scaled(rgb, fx, fy, how):
    h, w = rgb.shape[:2]
    to = (max(1, round(w * fx)), max(1, round(h * fy)))
    fx, fy = to[0] / w, to[1] / h
    matrix = np.array([[fx, 0, 0.5 * fx - 0.5], [0, fy, 0.5 * fy - 0.5], [0, 0, 1.0]])
    return cv2.resize(rgb, to, interpolation=how), matrix


def _turned(rgb, deg):
    """Turn clockwise about the middle, on a sheet grown to hold it."""
    h, w = rgb.shape[:2]
    t = np.radians(deg)
    c, s = np.cos(t), np.sin(t)
    grow_w, grow_h = int(np.ceil(abs(w * c) + abs(h * s))), int(np.ceil(abs(h * c) + abs(w * s)))
    mid, new = ((w - 1) / 2, (h - 1) / 2), ((grow_w - 1) / 2, (grow_h - 1) / 2)
    matrix = np.array(
        [[c, -s, new[0] - c * mid[0] + s * mid[1]], [s, c, new[1] - s * mid[0] - c * mid[1]], [0, 0, 1.0]]
    )
    turned = cv2.warpAffine(
        rgb,
        matrix[:2],
        (grow_w, grow_h),
        flags=cv2.INTER_CUBIC,
        borderMode=cv2.BORDER_CONSTANT,
        borderValue=_paper(rgb),
    )
    return turned, matrix


def _through_jpeg(rgb, quality, subsampling=2):
    store = io.BytesIO()
    Image.fromarray(rgb).save(store, "JPEG", quality=quality, subsampling=subsampling)
    return np.asarray(Image.open(store).convert("RGB"))


def _small(rgb, rng, recipe):
    shrunk, matrix = _scaled(
        rgb, *2 * [rng.uniform(0.4, 0.75)], rng.choice((cv2.INTER_AREA, cv2.INTER_CUBIC))
    )
    return Spoiled(rgb=shrunk, homography=matrix, recipe=recipe)


def _jpeg(rgb, rng, recipe):
    return Spoiled(
        rgb=rgb, homography=np.eye(3), recipe=recipe, suffix="jpg", quality=int(rng.integers(40, 91))
    )


def _small_jpeg(rgb, rng, recipe):
    shrunk, matrix = _scaled(rgb, *2 * [rng.uniform(0.45, 0.8)], cv2.INTER_AREA)
    once = _through_jpeg(shrunk, int(rng.integers(50, 91)))
    return Spoiled(
        rgb=once, homography=matrix, recipe=recipe, suffix="jpg", quality=int(rng.integers(50, 91))
    )


def _rotate(rgb, rng, recipe):
    turned, matrix = _turned(rgb, rng.uniform(0.5, 3.0) * rng.choice((-1, 1)))
    return Spoiled(rgb=turned, homography=matrix, recipe=recipe)


def _stretch(rgb, rng, recipe):
    factor = rng.uniform(1.03, 1.14) ** rng.choice((-1, 1))
    pulled, matrix = _scaled(rgb, *((factor, 1.0) if rng.random() < 0.5 else (1.0, factor)), cv2.INTER_LINEAR)
    return Spoiled(rgb=pulled, homography=matrix, recipe=recipe)


def _scan(rgb, rng, recipe):
    turned, matrix = _turned(rgb, rng.uniform(-1.5, 1.5))
    soft = cv2.GaussianBlur(turned, (0, 0), rng.uniform(0.4, 0.9)).astype(np.float32)
    h, w = soft.shape[:2]
    along = rng.uniform(0, 2 * np.pi)
    y, x = np.mgrid[0:h, 0:w].astype(np.float32)
    shade = 1 - rng.uniform(0.03, 0.12) * (
        0.5 + 0.5 * (np.cos(along) * (2 * x / w - 1) + np.sin(along) * (2 * y / h - 1))
    )
    tint = np.array([1.0, rng.uniform(0.97, 1.0), rng.uniform(0.93, 1.0)])
    grain = cv2.GaussianBlur(rng.normal(size=(h, w, 1)).astype(np.float32), (0, 0), 0.6)[..., None]
    noisy = soft * shade[..., None] * tint + rng.uniform(2, 6) * grain / 0.47
    noisy += rng.normal(scale=1.5, size=soft.shape)
    copy = np.clip(np.rint(noisy), 0, 255).astype(np.uint8)
    return Spoiled(
        rgb=copy, homography=matrix, recipe=recipe, suffix="jpg", quality=int(rng.integers(60, 91))
    )


def _fax(rgb, rng, recipe):
    grey = cv2.cvtColor(rgb, cv2.COLOR_RGB2GRAY).astype(float)
    paper = float(np.median(grey))
    if paper < 110:
        grey, paper = 255 - grey, 255 - paper
    turned, matrix = _turned(np.repeat(grey[..., None], 3, 2).astype(np.uint8), rng.uniform(-0.6, 0.6))
    noisy = turned[..., 0] + rng.normal(scale=6, size=turned.shape[:2])
    bits = np.where(noisy > paper * rng.uniform(0.72, 0.82), 255, 0).astype(np.uint8)
    return Spoiled(rgb=np.repeat(bits[..., None], 3, 2), homography=matrix, recipe=recipe, inks="black")


def _blur(rgb, rng, recipe):
    return Spoiled(
        rgb=cv2.GaussianBlur(rgb, (0, 0), rng.uniform(0.7, 1.6)), homography=np.eye(3), recipe=recipe
    )


def _palette(rgb, rng, recipe):
    n = int(rng.choice((16, 32, 64, 128)))
    dither = Image.Dither.FLOYDSTEINBERG if rng.random() < 0.3 else Image.Dither.NONE
    palette = Image.fromarray(rgb).quantize(n, method=Image.Quantize.MEDIANCUT)
    few = Image.fromarray(rgb).quantize(palette=palette, dither=dither).convert("RGB")
    return Spoiled(rgb=np.asarray(few), homography=np.eye(3), recipe=recipe, suffix="gif")


def _perspective(rgb, rng, recipe):
    h, w = rgb.shape[:2]
    corners = np.array([[0, 0], [w - 1, 0], [w - 1, h - 1], [0, h - 1]], np.float32)
    moved = corners + rng.uniform(-0.018, 0.018, corners.shape) * (w, h) + (0.02 * w, 0.02 * h)
    matrix = cv2.getPerspectiveTransform(corners, moved.astype(np.float32))
    size = (round(1.04 * w), round(1.04 * h))
    seen = cv2.warpPerspective(
        rgb, matrix, size, flags=cv2.INTER_CUBIC, borderMode=cv2.BORDER_CONSTANT, borderValue=_paper(rgb)
    )
    seen = cv2.GaussianBlur(seen, (0, 0), 0.6)
    return Spoiled(rgb=seen, homography=matrix / matrix[2, 2], recipe=recipe, suffix="jpg", quality=88)


def _grey(rgb, rng, recipe):
    grey = cv2.cvtColor(rgb, cv2.COLOR_RGB2GRAY)
    copy = _through_jpeg(np.repeat(grey[..., None], 3, 2), int(rng.integers(60, 91)))
    return Spoiled(rgb=np.ascontiguousarray(copy), homography=np.eye(3), recipe=recipe, inks="grey")


def _zoomed(rgb, rng, recipe):
    grown, matrix = _scaled(rgb, *2 * [rng.choice((1.25, 1.5, 1.75))], cv2.INTER_LINEAR)
    return Spoiled(rgb=grown, homography=matrix, recipe=recipe)


RECIPES = {
    "small": _small,
    "jpeg": _jpeg,
    "smalljpeg": _small_jpeg,
    "rotate": _rotate,
    "stretch": _stretch,
    "scan": _scan,
    "fax": _fax,
    "blur": _blur,
    "palette": _palette,
    "perspective": _perspective,
    "grey": _grey,
    "zoomed": _zoomed,
}
