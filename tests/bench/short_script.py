"""What a short script gets: a Hough circle, a colour mask and a column mean, nothing else.

usage: python tests/bench/short_script.py PICTURE --outer DB --centre DB --zero top --turn cw --ink '#rrggbb'
--out CSV

It is meant to be a fair one: the picture is brought to a workable size for the Hough transform, the largest
of the good circles is the rim, the mask is a distance in RGB, and the mean is taken over the outermost run of
ink in each column of the unwrapped picture. Law even only.
"""

import argparse
import sys

import cv2
import numpy as np

HOUGH_PX = 700  # longest side for the circle search
NEAR = 70  # distance in RGB that counts as the ink
COLUMNS = 1440
TOP = {"top": 0, "right": 90, "bottom": 180, "left": 270}


def read(path, *, outer_db, centre_db, zero, turn, ink):
    """Levels at bearings 0 to 359, (360,) dB, NaN where no ink was found; None when no circle was."""
    picture = cv2.imread(str(path), cv2.IMREAD_COLOR)
    found = largest_circle(picture)
    if found is None:
        return None
    x, y, radius = found
    colour = np.array([int(ink[k : k + 2], 16) for k in (5, 3, 1)], np.float32)
    mask = (np.linalg.norm(picture.astype(np.float32) - colour, axis=2) < NEAR).astype(np.uint8)
    size = (round(radius * 1.03), COLUMNS)
    plane = cv2.warpPolar(mask, size, (x, y), radius * 1.03, cv2.WARP_POLAR_LINEAR | cv2.INTER_NEAREST)
    levels = np.full(360, np.nan)
    for bearing in range(360):
        page_deg = TOP[zero] + (bearing if turn == "cw" else -bearing)
        row = round((page_deg - 90) % 360 * COLUMNS / 360) % COLUMNS  # warpPolar: 0 at the right, clockwise
        hits = np.flatnonzero(plane[row])
        if len(hits):
            run = hits[hits > hits[-1] - 8]
            rho = (run.mean() + 0.5) * 1.03 * radius / size[0] / radius
            levels[bearing] = outer_db + (rho - 1) * (outer_db - centre_db)
    return levels


def largest_circle(picture):
    """Centre and radius of the rim, px, or None."""
    grey = cv2.cvtColor(picture, cv2.COLOR_BGR2GRAY)
    zoom = min(1.0, HOUGH_PX / max(grey.shape))
    small = cv2.GaussianBlur(
        cv2.resize(grey, None, fx=zoom, fy=zoom, interpolation=cv2.INTER_AREA), (0, 0), 1
    )
    side = min(small.shape)
    circles = cv2.HoughCircles(
        small,
        cv2.HOUGH_GRADIENT,
        dp=1,
        minDist=side / 8,
        param1=120,
        param2=40,
        minRadius=side // 6,
        maxRadius=side // 2,
    )
    if circles is None:
        return None
    best = max(circles.reshape(-1, 3)[:5], key=lambda circle: circle[2])
    return tuple(float(v) / zoom for v in best)


def main(argv=None):
    """Read one picture and write its table."""
    parser = argparse.ArgumentParser()
    parser.add_argument("picture")
    parser.add_argument("--outer", type=float, required=True)
    parser.add_argument("--centre", type=float, required=True)
    parser.add_argument("--zero", choices=TOP, default="top")
    parser.add_argument("--turn", choices=("cw", "ccw"), default="cw")
    parser.add_argument("--ink", required=True)
    parser.add_argument("--out", required=True)
    args = parser.parse_args(argv)
    levels = read(
        args.picture, outer_db=args.outer, centre_db=args.centre, zero=args.zero, turn=args.turn, ink=args.ink
    )
    if levels is None:
        print("no circle", file=sys.stderr)
        return 3
    with open(args.out, "w") as file:
        file.write("angle_deg,chart_db\n")
        file.writelines(f"{bearing},{level:.3f}\n" for bearing, level in enumerate(levels))
    return 0


if __name__ == "__main__":
    sys.exit(main())
