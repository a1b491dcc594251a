"""What can be done at one place of the picture, as a menu at the pointer."""

import tkinter as tk

import numpy as np

from digitise import correct

__all__ = ["open_place_menu", "place_choices"]

NEAR_PX = 8.0  # design px on the screen


def place_choices(window, x_px, y_px):
    """(words, act) of everything that can be done at a place, in order."""
    session, actions = window.session, window.actions
    chart = session.chart
    if chart is None:
        yield "Place a grid", actions.place_grid_anew
        return
    reach = NEAR_PX * window.look.unit / window.chart_view.frame.zoom
    held = window.hand.nearest(x_px, y_px, reach)
    if held is not None:
        session.held = held
        if held[0] in ("mark", "pin", "cover", "ring"):
            yield f"Remove this {held[0]}", actions.drop_held
    grid = chart.grid
    if grid is not None:
        rho, plane = (float(value) for value in grid.to_plane(x_px, y_px))
        ring_x, ring_y = grid.to_picture(grid.ring_rho, plane)
        off = np.hypot(ring_x - x_px, ring_y - y_px)
        if off.min() < reach:
            k = int(off.argmin())
            yield "Type this ring's level\u2026", lambda: window.ask_level(x_px, y_px)
            if len(grid.ring_rho) > 1:
                yield (
                    "This is no ring",
                    lambda: _correct(actions, correct.drop_ring, grid, k, "remove a ring"),
                )
        else:
            yield "Add a ring here", lambda: _correct(actions, correct.add_ring, grid, rho, "add a ring")
        yield "0\u00b0 is printed in this direction", lambda: actions.attempt(session.zero_here, x_px, y_px)
    yield "Read only the trace of this ink", lambda: actions.attempt(session.pick_ink, x_px, y_px)
    yield "Read the trace of this ink too", lambda: actions.attempt(session.pick_ink, x_px, y_px, also=True)
    yield "Pin the trace here", lambda: actions.attempt(session.add_pin, round(x_px, 2), round(y_px, 2))


def open_place_menu(window, x_root, y_root, x_px, y_px):
    """Show the menu."""
    menu = tk.Menu(window.root, tearoff=False)
    for words, act in place_choices(window, x_px, y_px):
        menu.add_command(label=words, command=act)
    window.menu_here = menu
    menu.tk_popup(x_root, y_root)


def _correct(actions, change, grid, what, words):
    actions.attempt(lambda: actions.session.correct_grid(change(grid, what), words))
