"""The proof: colours that are not on the chart, lines where the reading lies, states told by shape."""

import time

import numpy as np
import pytest
from PIL import Image

from digitise._proof_colour import distinct_colours, main_colours
from digitise._proof_page import PANEL_PX, WIDTH_PX
from digitise._proof_panel import draw_sample, make_view, picture_panel
from digitise._proof_text import printable
from digitise.proof import draw_proof, encode_proof
from digitise.record import make_record
from digitise.review import reason
from tests.draw import paint, patterns
from tests.hand import INKS, cardioid_page, hand_reading, hand_table, painted

NEAR_LEVELS = (
    90.0  # colour levels within which a pixel counts as the overlay's colour, anti-aliased edges left out
)
FAR_LEVELS = 110.0  # and how far an overlay colour must be from what is on the chart
PLACE_PX = 1.0  # panel px that the drawn line's middle may be off the reading
SECONDS = 1.5  # a proof takes about 0.15 s; the bound only catches a blow-up on a busy machine


def proof_of(reading, n_traces=1):
    """Draw the proof of a reading."""
    tables = [f"panel.{k}.csv" for k in range(1, n_traces + 1)]
    return np.asarray(draw_proof(reading, make_record(reading, tables=tables)))


def colour_distance(rgb, colour):
    """Euclidean distance of every pixel to a colour, levels."""
    return np.sqrt(((rgb.astype(float) - np.asarray(colour, float)) ** 2).sum(axis=-1))


@pytest.mark.parametrize("paper", ["#ffffff", "#181a20", "#b8b8b0"])
@pytest.mark.parametrize("inks", [INKS[:1], INKS, ("#000000",), ("#ff00ff",)])
def test_overlay_colours_are_not_on_the_picture(paper, inks):
    """Whatever the paper and the inks: far from every colour there and from each other."""
    rgb = paint(cardioid_page(inks, paper=paper))
    present, commonest = main_colours(rgb)

    colours = distinct_colours(present, commonest, 3)

    assert colour_distance(commonest[None], [int(paper[k : k + 2], 16) for k in (1, 3, 5)]).max() < 12
    for k, colour in enumerate(colours):
        assert colour_distance(present, colour).min() > FAR_LEVELS / 2
        assert k == 0 or colour_distance(np.array(colours[:k]), colour).min() > FAR_LEVELS / 2
    assert colour_distance(present, colours[0]).min() > FAR_LEVELS


def test_the_reading_lies_on_the_ink_of_the_chart():
    """The overlay's pixels lie on the true curve: their radius about the centre is the cardioid's."""
    reading = hand_reading()
    proof = proof_of(reading)
    view = make_view(reading, width=PANEL_PX, least=360, most=690)
    shown = picture_panel(reading.picture.rgb, view, (255, 255, 255))
    colour = distinct_colours(*main_colours(shown), 1)[0]
    top, left = find_panel(proof, shown)
    panel = proof[top : top + view.height, left : left + view.width]

    y, x = np.nonzero(colour_distance(panel, colour) < NEAR_LEVELS)
    x0, y0 = view.place(reading.grid.centre_x, reading.grid.centre_y)
    bearing = np.degrees(np.arctan2(x - x0, y0 - y))
    drawn = np.hypot(x - x0, y - y0)
    true = (1 + np.maximum(patterns.first_order(bearing), -40) / 40) * reading.grid.outer_px * view.zoom
    keep = np.abs(bearing) < 150  # behind, the curve runs through the centre
    assert keep.sum() > 800
    assert abs(np.median(drawn[keep] - true[keep])) < PLACE_PX / 2
    assert np.percentile(np.abs(drawn[keep] - true[keep]), 95) < 2 * PLACE_PX


def find_panel(proof, shown):
    """Where a panel lies on the proof, by its left edge, which nothing is drawn on."""
    for top in range(60, 160):
        if np.array_equal(proof[top : top + len(shown), 24:30], shown[:, :6]) and not np.array_equal(
            proof[top - 1, 24:200], shown[0, :176]
        ):
            return top, 24
    raise AssertionError("the panel was not found")


def test_the_panel_keeps_places_at_every_zoom():
    """A cross on the picture is found where `View.place` says, enlarged, reduced and cut by the edge."""
    for zoom in (0.31, 0.64, 1.0, 2.7):
        rgb = np.full((400, 500, 3), 255, np.uint8)
        rgb[137:140, 200:203] = 0
        reading = hand_reading(rgb=np.full((620, 600, 3), 255, np.uint8))
        view = make_view(reading, width=300, least=100, most=700)
        view = type(view)(left=-10.3, top=20.4, zoom=zoom, width=round(300 * zoom), height=round(250 * zoom))
        panel = picture_panel(rgb, view, (255, 255, 255))

        dark = 255.0 - panel[..., 0]
        y, x = np.mgrid[: panel.shape[0], : panel.shape[1]]
        found = (dark * x).sum() / dark.sum(), (dark * y).sum() / dark.sum()
        np.testing.assert_allclose(found, view.place(201.0, 138.0), atol=0.1)


def test_states_differ_by_shape_alone():
    """In one colour, seen, bridged, floor and missing give four different drawings."""
    drawn = {}
    for state in ("seen", "bridged", "floor", "missing"):
        canvas = np.full((20, 44, 3), 255, np.uint8)
        draw_sample(canvas, state, (0, 0, 0))
        drawn[state] = (255 - canvas[..., 0]).astype(float)

    for state, ink in drawn.items():
        assert ink.sum() > 1000, state
        for other, second in drawn.items():
            assert state == other or np.abs(ink - second).sum() > 0.3 * ink.sum()
    assert np.ptp(np.nonzero(drawn["seen"])[0]) < 4
    assert np.ptp(np.nonzero(drawn["bridged"])[0]) > 5


@pytest.mark.parametrize(
    ("level", "state"),
    [
        (None, None),
        (np.full(360, -1.0), np.full(360, "missing")),
        (np.full(360, -40.0), np.full(360, "floor")),
        (None, np.where(np.arange(360) % 2, "seen", "missing")),
        (None, np.where(np.arange(360) < 180, "bridged", "missing")),
        (np.full(360, 3.0), None),
    ],
)
def test_every_kind_of_table_can_be_drawn(level, state):
    """All missing, all floor, every other row, half a chart, above the outermost ring."""
    table = hand_table(level, state=state)

    assert proof_of(hand_reading(table=table)).shape[1] == WIDTH_PX


def test_a_wide_error_is_drawn_as_a_wide_band():
    """The band on the chart drawn anew grows with the error."""
    inks = []
    for error_db in (0.1, 4.0):
        reading = hand_reading(table=hand_table(error_db=error_db))
        proof = proof_of(reading)
        right = proof[100:700, PANEL_PX + 60 :]
        inks.append(np.ptp(right.astype(int), axis=2).clip(max=60).sum())  # coloured pixels, faint ones too

    assert inks[1] > 1.5 * inks[0]


def test_reasons_are_numbered_on_the_chart_and_listed():
    """A reason with a place is marked there, and each reason adds to the sheet."""
    placed = reason("grid-residual", 1.4, x_px=300.0, y_px=60.0)
    bare, marked = hand_reading(), hand_reading(reasons=(placed, reason("peak-low", 6.0)))
    one, two = proof_of(bare), proof_of(marked)

    assert two.shape[0] > one.shape[0]
    changed = np.abs(one[:700, :PANEL_PX].astype(int) - two[:700, :PANEL_PX]).sum(axis=2) > 60
    assert changed.sum() > 40


def test_many_reasons_and_traces_still_fit():
    """More reasons than are listed, three traces, a long name of the file."""
    reasons = tuple(reason("text-unread", k, "words " * 30) for k in range(30))
    proof = proof_of(hand_reading(3, reasons=reasons, path="a" * 200 + ".png"), 3)

    assert proof[-6:].min() == 255
    assert proof.shape[0] < 2600


def test_half_charts_are_shown_whole():
    """The upper half alone: the view is wide, and holds the ring's ends and the centre."""
    reading = hand_reading()
    object.__setattr__(reading.grid, "arc_deg", np.array([270.0, 90.0]))
    view = make_view(reading, width=PANEL_PX, least=100, most=690)

    assert view.height < 0.75 * view.width
    for rho, plane in ((1.0, 270.0), (1.0, 0.0), (1.0, 90.0), (0.0, 0.0)):
        x, y = view.place(*reading.grid.to_picture(rho, plane))
        assert 0 < x < view.width
        assert 0 < y < view.height
    assert proof_of(reading).shape[1] == WIDTH_PX


def test_the_file_is_a_png_of_the_same_pixels(tmp_path):
    """Packed without loss, and quick."""
    reading = hand_reading()
    record = make_record(reading, tables=["panel.csv"])
    start = time.perf_counter()
    image = draw_proof(reading, record)
    data = encode_proof(image)
    taken = time.perf_counter() - start
    (tmp_path / "a.png").write_bytes(data)

    assert np.array_equal(np.asarray(Image.open(tmp_path / "a.png")), np.asarray(image))
    assert taken < SECONDS


def test_nothing_of_the_reading_is_altered():
    """The picture and the tables are the same after drawing."""
    reading = hand_reading()
    before = painted(1).copy()
    proof_of(reading)

    assert np.array_equal(reading.picture.rgb, before)


def test_letters_that_the_font_lacks_are_replaced():
    """Dashes and the minus sign become hyphens, accents go, the rest is a question mark."""
    assert printable("\u221240\u00b0 \u2013 caf\u00e9 \u4e2d") == "-40\u00b0 - cafe ?"
