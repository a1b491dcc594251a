"""What the worker thread does for the window's commands; each job returns all its answer needs."""

from digitise.exceptions import UsageError

from . import flow

__all__ = ["look_at_pages", "look_for_lines", "open_source", "save"]

MOST_PAGES = 24  # thumbnails at a time


def open_source(path, options):
    """A picture or record opened and read."""
    return flow.open_source(path, **options)


def save(state, folder, then):
    """The state read to its end and written; with what waits for it."""
    state = flow.complete(state)
    if not state.charts:
        raise UsageError("there is no chart to save", stage="outputs")
    return state, flow.save_charts(state, folder), then


def look_at_pages(path, size_px, first, only_if_several):
    """(number of pages, thumbnails from page `first` on, first, only_if_several)."""
    from digitise.pdf import page_count, page_thumbnails

    return (
        page_count(path),
        page_thumbnails(path, size_px=size_px, first=first, count=MOST_PAGES),
        first,
        only_if_several,
    )


def look_for_lines(work, state, grid, words):
    """(serial of the state, the grid on the drawn lines near it, words for the history)."""
    if work is flow.place_grid:
        grid = flow.place_grid(state, grid.centre_x, grid.centre_y, grid.outer_px)
    else:
        grid = work(state, grid)
    return state.serial, grid, words
