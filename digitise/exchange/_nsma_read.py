"""Reading an NSMA WG16.99.050 file: small faults are noted, what cannot be understood is refused."""

import math
import re

import numpy as np

from ._nsma_tags import DESCRIPTIONS, FREE, LENGTHS, POLARISATIONS, REQUIRED
from .cuts import Antenna, Cut
from .text import MAX_CUTS, MAX_POINTS, decode, malformed, take_float

__all__ = ["read_nsma"]

PLANES = {"H": "azimuth", "AZ": "azimuth", "V": "elevation", "EL": "elevation"}
SAME_DB = 0.011  # a closing point may differ from the first one by a rounding
MOST_NOTES = 40
OWN_COMMENT = re.compile(r"Azimuth grows (clockwise|counter-clockwise) seen from above")


def read_nsma(data, source, options):
    """An `Antenna` from the bytes of a file; raises `PictureError` with the line number."""
    reader = _Reader(source, options)
    for number, row in enumerate(decode(data, source, encoding="latin-1").splitlines(), 1):
        reader.take(number, row.strip())
    return reader.finish()


class _Reader:
    def __init__(self, source, options):
        self.source, self.options = source, options
        self.fields, self.comments, self.notes, self.cuts = {}, [], [], []
        self.place = -1  # of the last tag in the order of the text
        self.points = None  # (line, angle, level, decimals) of the cut at hand
        self.cut = {}
        self.counts = {}
        self.ended = False

    def take(self, number, row):
        """One line of the file."""
        if not row:
            return
        if row.startswith("!"):
            self.comments.append(row[1:].strip())
            return
        if self.ended:
            self.note(number, "something stands after ENDFIL")
            return
        tag, colon, rest = row.partition(":")
        if colon and tag.strip().isalnum() and not tag.strip().isdigit():
            self._field(number, tag.strip().upper(), rest.strip().removeprefix(",").strip(), len(row))
        elif self.points is not None:
            self._point(number, row)
        elif not self.fields:
            raise malformed(self.source, number, "the file does not begin with REVNUM", "is it an NSMA file?")
        else:
            raise malformed(self.source, number, f"neither a field nor a point of a cut ({row[:30]!r})")

    def note(self, number, said):
        """Keep a sentence on what was put up with."""
        if len(self.notes) < MOST_NOTES:
            self.notes.append(f"line {number}: {said}")

    def finish(self):
        """The antenna, once all lines were taken."""
        self._close_cut()
        if not self.fields:
            raise malformed(self.source, 1, "the file holds no fields", "is it an NSMA file?")
        if not self.cuts:
            raise malformed(self.source, None, "the file holds no cut")
        if not self.ended:
            self.notes.append("ENDFIL is missing: the file may have been cut off")
        lacking = [tag for tag in REQUIRED if tag not in self.fields]
        if lacking:
            self.notes.append(f"required fields are missing: {', '.join(lacking)}")
        self._check_counts()
        return self._antenna()

    def _field(self, number, tag, value, length):
        if tag not in LENGTHS:
            self.note(number, f"field {tag[:12]} is not one of the text; left out")
            return
        if length > LENGTHS[tag]:
            self.note(number, f"{tag} has {length} characters, {LENGTHS[tag]} are allowed")
        order = list(LENGTHS).index(tag)
        if tag in ("NOFREQ", "PATFRE", "NUMCUT", "PATCUT") or tag == "ENDFIL":
            self._close_cut()
        elif order < self.place and tag not in ("POLARI", "NUPOIN", "FSTLST"):
            self.note(number, f"{tag} stands out of order")
        self.place = order
        if tag == "ENDFIL":
            self.ended = True
        elif tag in ("PATFRE", "NUMCUT", "PATCUT", "POLARI", "NUPOIN", "FSTLST"):
            self._pattern_field(number, tag, value)
        elif tag in self.fields and order < list(LENGTHS).index("XORIEN"):
            self.note(number, f"{tag} stands twice; the first is kept")
        else:
            self.fields.setdefault(tag, (number, value))

    def _pattern_field(self, number, tag, value):
        if tag == "PATFRE":
            self.cut = {"frequency": take_float(value, self.source, number, "PATFRE")}
            self.counts.setdefault("frequencies", []).append([number, 0, None])
        elif tag == "NUMCUT":
            if self.counts.get("frequencies"):
                self.counts["frequencies"][-1][2] = (number, take_float(value, self.source, number, "NUMCUT"))
        elif tag == "PATCUT":
            if len(self.cuts) >= MAX_CUTS:
                raise malformed(self.source, number, f"more than {MAX_CUTS} cuts")
            self.cut = {
                "frequency": self.cut.get("frequency", math.nan),
                "designator": value.upper(),
                "line": number,
            }
            self.points = []
        elif self.points is None:
            raise malformed(self.source, number, f"{tag} stands before PATCUT")
        elif tag == "POLARI":
            if value.upper() not in POLARISATIONS:
                self.note(number, f"polarisation {value[:12]!r} is not one of the text")
            self.cut["polarisation"] = value
        else:
            self.cut[tag] = (number, value)

    def _point(self, number, row):
        parts = row.split(",")
        if len(parts) < 2 or not parts[1].strip():
            raise malformed(self.source, number, f"a point needs angle and level ({row[:30]!r})")
        if len(self.points) >= MAX_POINTS:
            raise malformed(self.source, number, f"more than {MAX_POINTS} points in a cut")
        angle = take_float(parts[0], self.source, number, "the angle")
        level = take_float(parts[1], self.source, number, "the level")
        if not -360 <= angle <= 360:
            raise malformed(self.source, number, f"the angle {angle:g} is not between -360 and 360")
        if len(parts) > 2 and parts[2].strip():
            self.counts["phases"] = self.counts.get("phases", 0) + 1
        self.points.append((number, angle, level, len(parts[1].strip().partition(".")[2])))

    def _close_cut(self):
        if self.points is None:
            return
        points, cut, self.points = self.points, self.cut, None
        if not points:
            raise malformed(self.source, cut["line"], "the cut holds no points")
        if "NUPOIN" in cut:
            number, value = cut["NUPOIN"]
            said = take_float(value, self.source, number, "NUPOIN")
            if said != len(points):
                self.note(
                    number, f"NUPOIN says {said:g} points, the cut holds {len(points)}; the points are taken"
                )
        points = self._without_closing(points)
        angle, level = np.array([p[1] for p in points]), np.array([p[2] for p in points])
        moves = np.diff(angle)
        if not (np.all(moves > 0) or np.all(moves < 0)):
            at = int(np.argmax(moves * np.sign(moves[0] or 1) <= 0)) + 1
            raise malformed(
                self.source, points[at][0], f"the angle {angle[at]:g} goes back: angles must run one way"
            )
        if abs(angle[-1] - angle[0]) >= 360:
            raise malformed(self.source, points[-1][0], "the angles run round more than once")
        self.cuts.append(self._make_cut(cut, points, angle, level))
        if self.counts.get("frequencies"):
            self.counts["frequencies"][-1][1] += 1

    def _without_closing(self, points):
        """The points without the last when it names the first one's direction again with the same level."""
        if len(points) < 3 or abs(abs(points[-1][1] - points[0][1]) - 360) > 1e-6:
            return points
        if abs(points[-1][2] - points[0][2]) > SAME_DB:
            raise malformed(
                self.source, points[-1][0],
                f"{points[-1][1]:g} degrees stand twice, with levels {points[0][2]:g} and {points[-1][2]:g}",
            )  # fmt: skip
        return points[:-1]

    def _make_cut(self, cut, points, angle, level):
        unit = self.fields.get("GUNITS", (0, "DBI/DBR"))[1].upper().partition("/")[2].strip() or "DBR"
        state = np.full(len(level), "seen", dtype="U8")
        decimals = max(p[3] for p in points)
        rounding = 0.5 * 10.0**-decimals
        if unit == "LIN":
            if np.any(level < 0):
                raise malformed(self.source, points[int(np.argmin(level))][0], "a field is negative")
            state[level < rounding] = "floor"
            least = max(rounding, float(level.max()) * 1e-9, 1e-12)
            level = 20 * np.log10(np.maximum(level, least))
            rounding = 0.0
        elif unit not in ("DBR", "DBI", "DBD"):
            number = self.fields["GUNITS"][0]
            raise malformed(self.source, number, f"the unit {unit[:12]!r} of the levels is not known")
        plane = PLANES.get(cut["designator"], "")
        if not plane:
            self.note(cut["line"], f"cut {cut['designator'][:12]!r} is neither azimuth nor elevation")
        at = self.options.of_file(plane, angle)
        order = np.argsort(at, kind="stable")
        if np.any(np.diff(at[order]) <= 0):
            raise malformed(self.source, cut["line"], "two points of the cut name one direction")
        return Cut(
            plane=plane, name=cut["designator"], designator=cut["designator"], frequency_mhz=cut["frequency"],
            polarisation=cut.get("polarisation", ""), unit={"DBI": "dBi", "DBD": "dBd"}.get(unit, "dB"),
            rounding_db=rounding, angle_deg=at[order], level_db=level[order], state=state[order],
            error95_db=np.full(len(order), np.nan),
        )  # fmt: skip

    def _check_counts(self):
        blocks = self.counts.get("frequencies", [])
        for _, n_cuts, said in blocks:
            if said and said[1] != n_cuts:
                self.note(said[0], f"NUMCUT says {said[1]:g} cuts, {n_cuts} follow")
        if "NOFREQ" in self.fields:
            number, value = self.fields["NOFREQ"]
            if take_float(value, self.source, number, "NOFREQ") != len(blocks):
                self.note(number, f"NOFREQ says {value} frequencies, {len(blocks)} follow")
        if self.counts.get("phases"):
            self.notes.append(f"{self.counts['phases']} points hold a phase, which is left out")

    def _check_turn(self, comment):
        """Note when the file's own comment names the other turn than the one taken."""
        said = OWN_COMMENT.match(comment)
        turn = {"clockwise": "cw", "counter-clockwise": "ccw"}.get(said[1]) if said else None
        if turn and turn != self.options.file_turn:
            number = self.fields["COMNT1"][0]
            self.note(number, f"the file says that azimuth grows {said[1]}; it was taken the other way")

    def _antenna(self):
        def number(tag, part=0):
            line, value = self.fields.get(tag, (0, ""))
            parts = value.split(",")
            return (
                take_float(parts[part], self.source, line, tag)
                if len(parts) > part and parts[part].strip()
                else math.nan
            )

        def text(tag):
            return self.fields.get(tag, (0, ""))[1]

        self._check_turn(text("COMNT1"))
        own = OWN_COMMENT.match(text("COMNT1"))
        lines = [*([] if own else [text("COMNT1"), text("COMNT2")]), *(text(tag) for tag in DESCRIPTIONS)]
        descriptions = tuple(line for line in lines if line)
        gain_unit = text("GUNITS").upper().partition("/")[0].strip()
        return Antenna(
            cuts=tuple(self.cuts),
            maker=text("ANTMAN"),
            model=text("MODNUM"),
            low_mhz=number("LOWFRQ"),
            high_mhz=number("HGHFRQ"),
            gain=number("MDGAIN"),
            gain_unit="dBd" if gain_unit == "DBD" else "dBi",
            azimuth_width_deg=number("AZWIDT"),
            elevation_width_deg=number("ELWIDT"),
            tilt_deg=number("ELTILT"),
            tilt_tolerance_deg=number("ELTILT", 1),
            front_to_back_db=number("FRTOBA"),
            pattern_kind=text("PATTYP"),
            date=text("DTDATA"),
            extra=tuple((tag, text(tag)) for tag in FREE if text(tag)),
            comments=(*descriptions, *self.comments),
            notes=tuple(self.notes),
        )
