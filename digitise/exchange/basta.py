"""NGMN BASTA pattern JSON (schema tagged WP3.0): one cut a file, attenuation in dB, positive down.

The names are those of the schema in an open library; the units beside numbers and the meaning of the
coordinate systems are from memory. Theta is taken as 0 at the zenith and 180 at the nadir in all of them,
phi as 0 in front, growing counter-clockwise seen from above in SPCS_Polar and SPCS_CCW and clockwise in
SPCS_CW.

A cut is written as the rows that it has: theta 90 and all phi for azimuth, phi 0 and 180 and all theta for
elevation. Two cuts do not fill the sphere, and nothing is written that was not read.
"""

import math

import numpy as np

from .._json import to_plain, to_text
from ..caution import CAUTION
from ..exceptions import UsageError
from .cuts import Antenna, Cut, Exported, resampled
from .plain import one_cut
from .text import line_of, malformed, parse_json

__all__ = ["read", "write"]

VERSION = "3.0"
ROW = ("Theta", "Phi", "MagAttenuationTP")
MAGNITUDES = ("MagAttenuationTP", "MagAttenuationCo")
PHI_CLOCKWISE = {"SPCS_Polar": False, "SPCS_CCW": False, "SPCS_CW": True}
MAX_ROWS = 2_000_000
HORIZON_DEG = 90.0


def write(antenna, options):
    """The one cut of an antenna as `Exported`."""
    cut = one_cut(antenna)
    if not cut.plane:
        raise UsageError("the format needs to know which cut it is", remedy="say --cut azimuth or elevation")
    lacking = [
        word
        for word, value in (("--frequency", _frequency(antenna, cut)), ("--gain", antenna.gain))
        if math.isnan(value)
    ]
    if lacking:
        raise UsageError("the format requires what is not known", remedy=f"give {' and '.join(lacking)}")
    cut, said = resampled(cut, 1.0 if math.isnan(options.step_deg) else options.step_deg)
    step = 1.0 if math.isnan(options.step_deg) else options.step_deg
    theta, phi = _to_sphere(cut, options)
    loss = np.round(np.max(cut.level_db) - cut.level_db, options.decimals) + 0.0
    order = np.lexsort((phi, theta))
    azimuth = cut.plane == "azimuth"
    node = {
        "BASTA_AA_WP_version": VERSION,
        "Supplier": antenna.maker or "not stated",
        "Antenna_Model": antenna.model or "not stated",
        "Coordinate_System": options.coordinates,
        "Frequency": {"value": _frequency(antenna, cut), "unit": "MHz"},
        "Gain": {"value": antenna.gain, "unit": antenna.gain_unit},
        "Phi_HPBW": antenna.azimuth_width_deg,
        "Theta_HPBW": antenna.elevation_width_deg,
        "Front_to_Back": antenna.front_to_back_db,
        "Theta_Electrical_Tilt": antenna.tilt_deg,
        "Nominal_Polarization": cut.polarisation or "not stated",
        "Theta_Sampling": [HORIZON_DEG, step, HORIZON_DEG] if azimuth else [0.0, step, 180.0],
        "Phi_Sampling": [0.0, step, 360.0 - step] if azimuth else [0.0, 180.0, 180.0],
        "Data_Set_Row_Structure": list(ROW),
        "Data_Set": [[float(theta[k]), float(phi[k]), float(loss[k])] for k in order],
    }
    if antenna.from_reading:
        node["Comment"] = CAUTION
    if np.any(
        np.abs((phi if azimuth else theta) / step - np.round((phi if azimuth else theta) / step)) > 1e-4
    ):
        raise UsageError(
            "the points lie between the steps that the format names",
            remedy="choose another --step or --front",
        )
    lost = [
        "row states and errors (error95_db)",
        "the polarisation of each part: levels are taken as total power",
        *said,
    ]
    if (cut.state == "floor").any():
        lost.append("that levels at the chart's centre are upper limits")
    checks = [
        f"{name} is required and not known: written as null" for name, value in node.items()
        if isinstance(value, float) and math.isnan(value)
    ]  # fmt: skip
    whole = round(360 / step)
    if len(order) < whole:
        checks.append(
            f"{whole - len(order)} of {whole} rows are not in Data_Set: only what was read is written"
        )
    return Exported(data=(to_text(to_plain(node)) + "\n").encode(), lost=tuple(lost), checks=tuple(checks))


def read(data, source, options):
    """An `Antenna` of the cuts that a file's rows make; raises `PictureError` with the line where it can."""
    text, node = parse_json(data, source)
    system = node.get("Coordinate_System", "SPCS_Polar")
    if not isinstance(system, str) or system not in PHI_CLOCKWISE:
        raise malformed(
            source, line_of(text, "Coordinate_System"), f"coordinate system {str(system)[:20]!r} is not known"
        )
    names = node.get("Data_Set_Row_Structure")
    if not isinstance(names, list) or not {"Theta", "Phi"} <= {
        name for name in names if isinstance(name, str)
    }:
        raise malformed(
            source, line_of(text, "Data_Set_Row_Structure"), "Data_Set_Row_Structure lacks Theta or Phi"
        )
    magnitude = next((name for name in MAGNITUDES if name in names), None)
    if magnitude is None:
        raise malformed(
            source, line_of(text, "Data_Set_Row_Structure"), f"no {' or '.join(MAGNITUDES)} in the rows"
        )
    rows = _rows(node, len(names), text, source)
    theta, phi, loss = (rows[:, names.index(name)] for name in ("Theta", "Phi", magnitude))
    if np.any((theta < 0) | (theta > 180) | (phi < -360) | (phi > 360)):
        raise malformed(source, line_of(text, "Data_Set"), "a theta is outside 0 to 180 or a phi beyond 360")
    clockwise = PHI_CLOCKWISE[system]
    cuts = _cuts_of(theta, phi % 360, loss, clockwise, text, source)
    notes = []
    used = sum(len(cut.angle_deg) for cut in cuts)
    if len(rows) > used:
        notes.append(f"{used} of {len(rows)} rows are the two cuts; the others are left out")
    gain = node.get("Gain") if isinstance(node.get("Gain"), dict) else {}
    unit = gain.get("unit", "dBi")
    return Antenna(
        cuts=tuple(cuts),
        maker=str(node.get("Supplier", ""))[:200],
        model=str(node.get("Antenna_Model", ""))[:200],
        low_mhz=_mhz(node, text, source),
        high_mhz=_mhz(node, text, source),
        gain=_value(gain, "value", text, source),
        gain_unit=unit if unit in ("dBi", "dBd") else "dBi",
        azimuth_width_deg=_value(node, "Phi_HPBW", text, source),
        elevation_width_deg=_value(node, "Theta_HPBW", text, source),
        tilt_deg=_value(node, "Theta_Electrical_Tilt", text, source),
        front_to_back_db=_value(node, "Front_to_Back", text, source),
        notes=tuple(notes),
    )


def _to_sphere(cut, options):
    """Theta and phi of a cut's points."""
    if cut.plane == "azimuth":
        phi = cut.angle_deg if PHI_CLOCKWISE[options.coordinates] else (360 - cut.angle_deg) % 360
        return np.full(len(phi), HORIZON_DEG), np.round(phi, 6) + 0.0
    up = cut.angle_deg  # 0 in front, 90 at the zenith, 180 behind
    theta = np.abs((90 - up + 180) % 360 - 180)
    phi = np.where((up > 90) & (up < 270), 180.0, 0.0)
    return np.round(theta, 6), phi


def _cuts_of(theta, phi, loss, clockwise, text, source):
    cuts = []
    poles = np.isclose(theta, 0) | np.isclose(theta, 180)  # one direction each, whatever phi says
    for plane, chosen in (
        ("azimuth", np.isclose(theta, HORIZON_DEG)),
        ("elevation", np.isclose(phi % 180, 0) & ~(poles & ~np.isclose(phi % 360, 0))),
    ):
        if chosen.sum() < 3:
            continue
        if plane == "azimuth":
            turn = phi[chosen] if clockwise else -phi[chosen]
        else:
            turn = np.where(phi[chosen] < 90, 90 - theta[chosen], 90 + theta[chosen])
        angle = np.round(turn % 360, 9) % 360
        order = np.argsort(angle, kind="stable")
        again = np.concatenate(([False], np.diff(angle[order]) < 1e-6))
        level = -loss[chosen][order]
        if np.any(np.abs(np.diff(level)[again[1:]]) > 0.011):
            raise malformed(source, line_of(text, "Data_Set"), "one direction stands twice with two levels")
        keep = order[~again]
        cuts.append(
            Cut(
                plane=plane, name="H" if plane == "azimuth" else "V", angle_deg=angle[keep],
                level_db=-loss[chosen][keep] + 0.0, error95_db=np.full(len(keep), np.nan),
                state=np.full(len(keep), "seen", dtype="U8"),
                rounding_db=0.5 * 10.0 ** -_decimals(loss[chosen]),
            )
        )  # fmt: skip
    if not cuts:
        raise malformed(source, line_of(text, "Data_Set"), "no row lies on the horizon or on phi 0 and 180")
    return cuts


def _rows(node, n_columns, text, source):
    line, rows = line_of(text, "Data_Set"), node.get("Data_Set")
    if not isinstance(rows, list) or not 3 <= len(rows) <= MAX_ROWS:
        raise malformed(source, line, f"Data_Set is not a list of 3 to {MAX_ROWS} rows")
    for k, row in enumerate(rows):
        good = isinstance(row, list) and len(row) == n_columns
        if not good or not all(isinstance(item, (int, float)) and abs(item) < 1e9 for item in row):
            raise malformed(source, line, f"row {k + 1} of Data_Set is not {n_columns} numbers")
    return np.array(rows, float)


def _value(node, name, text, source):
    value = node.get(name)
    if value is None:
        return math.nan
    if not isinstance(value, (int, float)) or isinstance(value, bool) or not abs(value) < 1e15:
        raise malformed(source, line_of(text, name), f"{name} is not a number")
    return float(value)


def _mhz(node, text, source):
    frequency = node.get("Frequency")
    if isinstance(frequency, dict):
        factor = {"Hz": 1e-6, "kHz": 1e-3, "MHz": 1.0, "GHz": 1e3}.get(frequency.get("unit", "MHz"))
        if factor is None:
            raise malformed(source, line_of(text, "Frequency"), "the unit of Frequency is not known")
        return _value(frequency, "value", text, source) * factor
    return _value(node, "Frequency", text, source)


def _frequency(antenna, cut):
    if math.isfinite(cut.frequency_mhz):
        return cut.frequency_mhz
    high = antenna.high_mhz if math.isfinite(antenna.high_mhz) else antenna.low_mhz
    return (antenna.low_mhz + high) / 2


def _decimals(values):
    return next((k for k in range(7) if np.allclose(values, np.round(values, k), atol=1e-9, rtol=0)), 6)
