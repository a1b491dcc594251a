"""Where circles share a centre: votes of image gradients, and the centre and stretch that explain them.

The gradient at a pixel on a ring points through the ring's centre, whatever the radius, so all rings of a grid
agree on one point while letters, traces and frames do not (gradient-directed circle voting: Kimme, Ballard &
Sklansky 1975). The votes are kept as a histogram of lines (direction, distance from the origin) and summed back
at every candidate centre, which costs the same however many pixels vote.
For rings stretched to concentric ellipses (p - c)' M (p - c) = const the gradient is parallel to M (p - c): one
linear equation a pixel in M and c, whatever the ring; a spoke's gradient is square to p - c.
"""

from dataclasses import dataclass

import cv2
import numpy as np

from ._unwrap import shrink

__all__ = ["Edges", "Hub", "centre_candidates", "find_edges", "fit_hub", "ring_shares"]

WORK_PIXELS = 0.6e6  # size of the reduced picture that votes
FLOOR_LEVELS = 1.0  # weakest gradient that votes, grey levels per px: a pale ring, smoothed, on clean paper
NOISE_FACTOR = 4.0  # and this many times the noise of the gradient
MAX_VOTERS = 40_000
N_DIRECTIONS = 90
VOTE_CAP = 4.0  # one direction cannot count for more than this many standard deviations
ROUNDS = 4  # at each tolerance
WIDE = (0.15, 0.10, 0.06, 0.04, 0.03)  # radians, for a centre known to a few per cent of the outer radius
MOVE_PX, STRETCH = 30.0, 0.08  # expected sizes of a move and a stretch
PULL = 0.02**2  # variance of a gradient's direction
SMALL_STRETCH = 0.012
HUB_POINTS = 8_000  # edge pixels that refine a centre
RHO_BIN_PX = 2.0
CENTRE_STEP_PX = 4.0  # spacing of the candidate centres on the reduced picture
N_SECTORS = 72  # of a circle, each drawn or not
RING_MISS = 0.09  # radians between gradient and radius of a ring pixel


@dataclass(frozen=True, eq=False, kw_only=True)
class Edges:
    """Edge pixels of a (reduced) picture.

    image : the reduced picture, float32 grey; to_full : (3, 3) its px -> the picture's
    x, y : (n,) float32, px of the reduced picture; gx, gy : (n,) unit gradient
    """

    image: np.ndarray
    to_full: np.ndarray

    x: np.ndarray
    y: np.ndarray
    gx: np.ndarray
    gy: np.ndarray


@dataclass(frozen=True, eq=False, kw_only=True)
class Hub:
    """A centre and stretch that edge pixels agree on, px of the reduced picture.

    x, y : centre; a, b : stretch, M = [[1 + a, b], [b, 1 - a]]
    """

    x: float
    y: float
    a: float = 0.0
    b: float = 0.0

    def metric(self, dx, dy):
        """M (dx, dy)."""
        return (1 + self.a) * dx + self.b * dy, self.b * dx + (1 - self.a) * dy

    def homography(self, outer):
        """Chart plane -> px of the reduced picture, for an outer (elliptical) radius; None when the stretch is wild."""
        values, vectors = np.linalg.eigh([[1 + self.a, self.b], [self.b, 1 - self.a]])
        if values.min() < 0.3:
            return None
        h = np.eye(3)
        h[:2, :2] = outer * vectors @ np.diag(values**-0.5) @ vectors.T
        h[:2, 2] = self.x, self.y
        return h


def find_edges(gray, *, work_pixels=WORK_PIXELS):
    """Reduce a grey picture (h, w) and list its edge pixels as `Edges`."""
    image, to_full = shrink(gray, float(np.sqrt(work_pixels / gray.size)))
    small = cv2.GaussianBlur(image, (0, 0), 1.0)
    gx = cv2.Scharr(small, cv2.CV_32F, 1, 0, scale=1 / 32)
    gy = cv2.Scharr(small, cv2.CV_32F, 0, 1, scale=1 / 32)
    size = np.sqrt(gx * gx + gy * gy)  # cv2.magnitude's last bit hangs on where in memory the array lies
    noise = float(np.median(size[::3, ::3])) / 1.177  # the median of a Rayleigh distribution is 1.177 sigma
    y, x = np.nonzero(size > max(FLOOR_LEVELS, NOISE_FACTOR * noise))
    if len(x) > MAX_VOTERS:
        keep = np.random.default_rng(20240611).permutation(len(x))[:MAX_VOTERS]
        y, x = y[keep], x[keep]
    norm = size[y, x]
    return Edges(
        image=image,
        to_full=to_full,
        x=x.astype(np.float32),
        y=y.astype(np.float32),
        gx=gx[y, x] / norm,
        gy=gy[y, x] / norm,
    )


def centre_candidates(edges, *, n_max=8):
    """Points that many gradients point through: list of (x, y, votes), strongest first, px of the reduced picture."""
    if len(edges.x) < 50:
        return []
    h, w = edges.image.shape
    total = sum(_line_votes(edges, gx, gy) for gx, gy in ((edges.gx, edges.gy), (-edges.gy, edges.gx)))
    xs, ys = np.arange(total.shape[1]) * CENTRE_STEP_PX, np.arange(total.shape[0]) * CENTRE_STEP_PX
    total = cv2.GaussianBlur(total, (0, 0), 1.0)
    top = cv2.dilate(total, np.ones((9, 9), np.uint8))
    peak_y, peak_x = np.nonzero((total >= top) & (total > 0.25 * total.max()))
    order = np.argsort(-total[peak_y, peak_x])[:n_max]
    return [(float(xs[peak_x[i]]), float(ys[peak_y[i]]), float(total[peak_y[i], peak_x[i]])) for i in order]


def _line_votes(edges, dx, dy):
    """Votes (0 to VOTE_CAP) of the lines through all edge pixels along (dx, dy), at every candidate centre.

    Along the gradient they are the radii of rings; square to it they are the spokes themselves.
    """
    h, w = edges.image.shape
    reach = float(np.hypot(h, w))
    n_rho = int(2 * reach / RHO_BIN_PX) + 8
    angle = np.arctan2(dy, dx) % np.pi
    k = np.minimum((angle * (N_DIRECTIONS / np.pi)).astype(np.int64), N_DIRECTIONS - 1)
    rho = (edges.y * dx - edges.x * dy) * np.where((dy < 0) | ((dy == 0) & (dx < 0)), -1, 1)
    j = ((rho + reach) / RHO_BIN_PX).astype(np.int64)
    count = np.bincount(k * n_rho + j, minlength=N_DIRECTIONS * n_rho).reshape(N_DIRECTIONS, n_rho)
    count = count.astype(np.float32)
    near = cv2.blur(count, (5, 1))
    wide = cv2.blur(count, (61, 1))
    score = np.clip((near - wide) / np.sqrt(wide / 5 + 0.04), -1, VOTE_CAP).astype(np.float32)
    middle = (np.arange(N_DIRECTIONS) + 0.5) * np.pi / N_DIRECTIONS
    xs = np.arange(0, w, CENTRE_STEP_PX, dtype=np.float32) / RHO_BIN_PX
    ys = np.arange(0, h, CENTRE_STEP_PX, dtype=np.float32) / RHO_BIN_PX
    total = np.zeros((len(ys), len(xs)), np.float32)
    for row, c, s in zip(score, np.cos(middle), np.sin(middle)):
        at = (np.float32(-s) * xs + np.float32(reach / RHO_BIN_PX)) + np.float32(c) * ys[:, None]
        total += row[at.astype(np.int32)]
    return total / N_DIRECTIONS


def fit_hub(edges, x, y, *, reach_px=None, a=0.0, b=0.0, tolerances=WIDE):
    """Refine a centre candidate and its stretch from all gradients that agree with it, as a `Hub`; None without.

    reach_px : pixels further away do not count; a, b : first stretch; tolerances : radians, falling
    A trace that is nearly a ring can feign a stretch, so a round hub competes with a stretched one: the rings about
    the better hub are the sharper.
    """
    hub = _fit_hub(edges, x, y, reach_px, a, b, tolerances, stretch=True)
    if hub is not None and max(abs(hub.a), abs(hub.b)) < SMALL_STRETCH:
        return hub
    plain = _fit_hub(edges, x, y, reach_px, 0.0, 0.0, tolerances, stretch=False)
    hubs = [h for h in (plain, hub) if h is not None]
    return max(hubs, key=lambda h: _sharpness(edges, h, reach_px)) if hubs else None


def _sharpness(edges, hub, reach_px):
    """Sum of powers of the shares of all circles about a hub: large when few circles hold all the edges."""
    share, _ = ring_shares(edges, hub)
    return float(np.sum(share[: None if reach_px is None else int(reach_px)] ** 4))


def _fit_hub(edges, x, y, reach_px, a, b, tolerances, *, stretch):
    """Robust Gauss-Newton on the angle between gradient and M (p - c), or on its departure from a right angle."""
    every = max(1, len(edges.x) // HUB_POINTS)
    at, grad = np.stack([edges.x, edges.y])[:, ::every], np.stack([edges.gx, edges.gy])[:, ::every]
    free = 4 if stretch else 2
    done = None
    # Pixels of no ring add to the normal matrix but not to the pull, so one step covers only part of the way.
    for tolerance in np.repeat(tolerances, ROUNDS):
        if tolerance == done:
            continue
        d = at - np.array([[x], [y]])
        r = np.hypot(*d)
        near = (r > 4) & (r < (reach_px or np.inf))
        d, g, r = d[:, near], grad[:, near], r[near]
        m = np.array([[1 + a, b], [b, 1 - a]]) @ d
        ring, spoke = (g[0] * m[1] - g[1] * m[0]) / r, (g * d).sum(axis=0) / r
        on, along = np.abs(ring) < tolerance, np.abs(spoke) < tolerance
        if on.sum() < 20:
            return None
        gx, gy, dx, dy, rr = g[0, on], g[1, on], d[0, on], d[1, on], r[on]
        rows = np.stack(
            [gy * (1 + a) - gx * b, gy * b - gx * (1 - a), -gx * dy - gy * dx, gx * dx - gy * dy][:free], axis=1
        )
        more = np.zeros((int(along.sum()), free))
        more[:, :2] = -g[:, along].T
        jac = np.concatenate([rows / rr[:, None], more / r[along, None]])
        error = np.concatenate([ring[on], spoke[along]])
        weighted = jac * ((1 - (error / tolerance) ** 2) ** 2)[:, None]
        # a weak pull to the spot and to no stretch matters only when few pixels agree
        hold = PULL / np.array([MOVE_PX, MOVE_PX, STRETCH, STRETCH][:free]) ** 2
        value = np.array([0.0, 0.0, a, b][:free])
        step = np.zeros(4)
        step[:free] = -np.linalg.solve(weighted.T @ jac + np.diag(hold), weighted.T @ error + hold * value)
        x, y, a, b = x + step[0], y + step[1], float(a + step[2]), float(b + step[3])
        if np.abs(step[:2]).max() < 0.05 and np.abs(step[2:]).max() < 3e-4:
            done = tolerance
        if not (abs(a) < 0.3 and abs(b) < 0.3 and np.isfinite(x) and np.isfinite(y)):
            return None
    return Hub(x=float(x), y=float(y), a=a, b=b)


def ring_shares(edges, hub):
    """Share of every circle about a hub that is drawn.

    Returns
    -------
    share : (n,) for radius 0, 1, 2 ... px of the reduced picture, 0 to 1
    half : (n,) the same of the better half circle
    """
    dx, dy = edges.x - hub.x, edges.y - hub.y
    mx, my = hub.metric(dx, dy)
    r = np.sqrt(np.maximum(dx * mx + dy * my, 0))
    miss = np.abs(edges.gx * my - edges.gy * mx) / (np.hypot(mx, my) + 1e-6)
    ok = (miss < RING_MISS) & (r > 6)
    sector = (np.arctan2(dy, dx)[ok] % (2 * np.pi) * (N_SECTORS / (2 * np.pi))).astype(np.int64) % N_SECTORS
    row = np.round(r[ok]).astype(np.int64)
    n = int(row.max(initial=0)) + 2
    count = np.bincount(row * N_SECTORS + sector, minlength=n * N_SECTORS).reshape(n, N_SECTORS)
    drawn = (count + np.roll(count, 1, axis=0)) > 0
    wrapped = np.concatenate([drawn, drawn[:, : N_SECTORS // 2]], axis=1).cumsum(axis=1)
    half = (wrapped[:, N_SECTORS // 2 :] - wrapped[:, : -(N_SECTORS // 2)]).max(axis=1) / (N_SECTORS / 2)
    return drawn.mean(axis=1), half
