"""Make the README's picture of the window over a sample: `python -m tests.window_picture`."""

import tkinter as tk
from pathlib import Path

from gui.window import Window
from tests.screen import Driver, open_screen, take_picture

SAMPLES = Path(__file__).parent.parent / "sample_images"
ROW = 300


def main():
    """Open the sample, point at a row of its second trace, keep the picture."""
    with open_screen():
        driver = Driver(Window(tk.Tk(), percent=100))
        driver.root.geometry("1280x760+0+0")
        driver.window.actions.open_path(str(SAMPLES / "two-bands.png"))
        driver.read()
        driver.window.trace_chosen(1)
        driver.window.row_pointed(ROW)
        picture = take_picture(driver.root, "readme").convert("P", palette=1, colors=256)
        picture.save(SAMPLES / "window.png", optimize=True)
        driver.window.close()


if __name__ == "__main__":
    main()
