"""The printed text of a page as words and phrases with exact places, in display points.

The engine gives single letters; they are joined here along their own line, whatever its turn, since a drawing
program may set "-10" as two objects and a whole row of ring labels as one. Text that is not drawn (the hidden
layer of a scanned page that was read by a machine) is left out: it is somebody else's reading.
"""

import ctypes
import math
import re
import unicodedata
from dataclasses import dataclass, replace

import numpy as np

from ._pdf_objects import VectorText

__all__ = ["collect_texts"]

MAX_LETTERS = 20_000
JOIN_EM = 0.28  # letters closer than this are one word, unless a space is set between
SPACE_EM = 0.75  # and words closer than this one phrase
OFF_LINE_EM = 0.25
INVISIBLE = 3  # text rendering mode, ISO 32000-1, table 106
MINUS = "\u2212"
SIGNS = "+-" + MINUS
TIGHT_EM = 0.08  # letters of one number stand closer, also where they are set one by one
OTHER_SIZE = 1.15
NEXT_PLACES = 3  # of the page's letters, spaces counted
NUMBER_BEFORE = re.compile(rf"[{re.escape(SIGNS)}]?\d+([.,]\d+)?(dB[id]?|\u00b0|deg)?", re.IGNORECASE)


@dataclass(frozen=True, kw_only=True)
class _Letter:
    """A letter.

    sign; s0, s1, t0, t1 : its box along and across its line; base, turn : of the line; size : of the font
    spaced : a space is set before it; item, place : its text object, and which letter of the page it is
    """

    sign: str
    s0: float
    s1: float
    t0: float
    t1: float
    base: float
    turn: float
    size: float
    spaced: bool = False
    item: int = 0
    place: int = 0


def collect_texts(page, view):
    """The visible text of an open page as a tuple of `VectorText` in display points."""
    from pypdfium2 import raw

    text_page = raw.FPDFText_LoadPage(page)
    if not text_page:
        return ()
    try:
        letters = list(_letters(raw, text_page, view))
    finally:
        raw.FPDFText_ClosePage(text_page)
    return tuple(_phrase(group) for group in _phrases(letters))


def _letters(raw, text_page, view):
    """Every drawn letter in reading order; spaces are remembered with the letter that follows."""
    left, right, bottom, top, x, y = (ctypes.c_double() for _ in range(6))
    scale = math.sqrt(abs(np.linalg.det(view.matrix[:, :2])))
    hidden, spaced = {}, False
    for k in range(min(raw.FPDFText_CountChars(text_page), MAX_LETTERS)):
        code = raw.FPDFText_GetUnicode(text_page, k)
        sign = chr(code) if 32 < code < 0x110000 and not 0xD800 <= code < 0xE000 else ""
        if raw.FPDFText_IsGenerated(text_page, k) == 1:
            continue
        if not sign.strip():
            spaced = True
            continue
        item = raw.FPDFText_GetTextObject(text_page, k)
        key = ctypes.addressof(item.contents) if item else 0
        if key and key not in hidden:
            hidden[key] = raw.FPDFTextObj_GetTextRenderMode(item) == INVISIBLE
        if hidden.get(key):
            continue
        if not raw.FPDFText_GetCharBox(text_page, k, left, right, bottom, top):
            continue
        m = raw.FS_MATRIX()
        along = np.array([1.0, 0.0])
        if raw.FPDFText_GetMatrix(text_page, k, m):
            along = np.array([m.a, m.b])
        along = view.matrix[:, :2] @ along
        if not raw.FPDFText_GetCharOrigin(text_page, k, x, y):
            x.value, y.value = left.value, bottom.value
        numbers = np.array([left.value, right.value, bottom.value, top.value, x.value, y.value])
        if not np.isfinite(numbers).all() or not np.isfinite(along).all() or not along.any():
            continue
        turn = math.atan2(along[1], along[0])
        turn = round(math.degrees(turn), 2)
        corners = np.array([[a, b] for a in numbers[:2] for b in numbers[2:4]])
        size = raw.FPDFText_GetFontSize(text_page, k) * scale
        yield replace(
            _letter(sign, corners, numbers[4:], turn, size, m, view), spaced=spaced, item=key, place=k
        )
        spaced = False


def _letter(sign, corners, origin, turn, size, text_matrix, view):
    """A letter in its line's own frame: s along the line, t across it, downward."""
    c, s = math.cos(math.radians(turn)), math.sin(math.radians(turn))
    frame = np.array([[c, s], [-s, c]]) @ view.matrix[:, :2]
    shift = np.array([[c, s], [-s, c]]) @ view.matrix[:, 2]
    own = corners @ frame.T + shift
    at = frame @ origin + shift
    # A font of size 1 under a matrix of 10 is 10 high.
    stretch = math.hypot(text_matrix.a, text_matrix.b) or 1.0
    size = size * stretch if size * stretch > 0 else float(np.ptp(own[:, 1]))
    return _Letter(
        sign=sign,
        s0=own[:, 0].min(),
        s1=own[:, 0].max(),
        t0=own[:, 1].min(),
        t1=own[:, 1].max(),
        base=float(at[1]),
        turn=turn,
        size=float(size),
    )


def _phrases(letters):
    """Groups of letters close together on one line, each a list of (letter, gap before it in em)."""
    groups = []
    lines = {}
    for letter in letters:
        lines.setdefault(letter.turn, []).append(letter)
    for members in lines.values():
        rows = []
        for letter in sorted(members, key=lambda item: item.base):
            tolerance = OFF_LINE_EM * letter.size
            if rows and letter.base - rows[-1][-1].base <= min(tolerance, OFF_LINE_EM * rows[-1][-1].size):
                rows[-1].append(letter)
            else:
                rows.append([letter])
        for row in rows:
            row.sort(key=lambda item: item.s0)
            group = []
            for letter in row:
                gap = (letter.s0 - group[-1][0].s1) / max(letter.size, 1e-6) if group else 0.0
                if group and (gap > SPACE_EM or _begins_another(group, letter, gap)):
                    groups.append(group)
                    group = []
                group.append((letter, gap if group else 0.0))
            groups.append(group)
    return groups


def _is_spaced(letter, gap):
    """Whether a space stands before a letter, as a letter of its own or as bare paper."""
    return gap > JOIN_EM or (letter.spaced and gap > 0)


def _begins_another(group, letter, gap):
    """Whether a letter begins a label of its own: numbers printed close to each other are several labels."""
    last = group[-1][0]
    apart = letter.item != last.item
    if apart and not 1 / OTHER_SIZE < letter.size / max(last.size, 1e-6) < OTHER_SIZE:
        return True
    if not (letter.sign.isdigit() or letter.sign in SIGNS):
        return False
    before = "".join(item.sign for item, _ in group)
    if not NUMBER_BEFORE.fullmatch(before):
        return False
    follows = 0 < letter.place - last.place <= NEXT_PLACES
    return _is_spaced(letter, gap) or not before[-1].isdigit() or (apart and (gap > TIGHT_EM or not follows))


def _phrase(group):
    letters = [letter for letter, _ in group]
    text = "".join((" " if _is_spaced(letter, gap) else "") + letter.sign for letter, gap in group)
    s0, s1 = min(item.s0 for item in letters), max(item.s1 for item in letters)
    t0, t1 = min(item.t0 for item in letters), max(item.t1 for item in letters)
    turn = math.radians(letters[0].turn)
    s, t = (s0 + s1) / 2, (t0 + t1) / 2
    return VectorText(
        text=unicodedata.normalize("NFKC", text).replace(MINUS, "-"),
        x=s * math.cos(turn) - t * math.sin(turn),
        y=s * math.sin(turn) + t * math.cos(turn),
        w=s1 - s0,
        h=t1 - t0,
        angle_deg=letters[0].turn,
        size=float(np.median([item.size for item in letters])),
    )
