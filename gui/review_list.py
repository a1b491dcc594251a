"""The reasons to look, as a list of sentences; each leads to its place on the picture."""

import tkinter as tk
from tkinter import ttk

from .places import reason_places
from .theme import COLOURS

__all__ = ["ReviewList"]


class ReviewList(ttk.Frame):
    """Sentences that wrap; click one, or choose with the arrow keys, to be led to its place.

    spots : list of (sentence, places.Spot); at : index of the chosen one, or None
    """

    def __init__(self, parent, window):
        super().__init__(parent)
        self.window, self.session, self.look = window, window.session, window.look
        px = self.look.px
        self.text = tk.Text(
            self, wrap="word", font=self.look.fonts["text"], height=4, width=20, relief="flat", borderwidth=0,
            background=COLOURS["paper"], foreground=COLOURS["text"], padx=px(6), pady=px(5), cursor="arrow",
            highlightthickness=px(1), highlightcolor=COLOURS["focus"], highlightbackground=COLOURS["rule"],
            spacing3=px(4), takefocus=True, insertwidth=0, selectbackground=COLOURS["paper"],
            selectforeground=COLOURS["text"],
        )  # fmt: skip
        self.tree = self.text  # what takes the keyboard on this page
        bar = ttk.Scrollbar(self, orient="vertical", command=self.text.yview)
        self.text.configure(yscrollcommand=bar.set)
        bar.pack(side="right", fill="y")
        self.text.pack(fill="both", expand=True)
        indent = self.look.fonts["text"].measure("00  ")
        self.text.tag_configure("item", lmargin2=indent, tabs=(indent,))
        self.text.tag_configure("chosen", background=COLOURS["alert-soft"])
        self.text.tag_configure("number", foreground=COLOURS["alert"], font=self.look.fonts["bold"])
        self.text.tag_configure("calm", foreground=COLOURS["accent"])
        self.text.tag_configure("alert", foreground=COLOURS["alert"])
        for key, step in (("<Down>", 1), ("<Up>", -1), ("<Return>", 0), ("<space>", 0)):
            self.text.bind(key, lambda _, step=step: self.step(step))
        self.spots, self.at, self._shown = [], None, ()

    def refresh(self):
        """Show the reasons; their number."""
        session = self.session
        reading = session.chart.reading if session.chart is not None else None
        key = (reading, session.open, session.fault, session.now.done)
        if key != self._shown:
            self._shown, self.at = key, None
            self.spots = reason_places(reading) if reading is not None else []
            self._write()
        return len(self.spots)

    def _write(self):
        self.text.configure(state="normal")
        self.text.delete("1.0", "end")
        for k, (sentence, _) in enumerate(self.spots):
            name = f"item{k}"
            self.text.insert(
                "end", f"{k + 1}\t", ("item", "number", name), plain(sentence) + "\n", ("item", name)
            )
            self.text.tag_bind(name, "<Button-1>", lambda _, k=k: self.choose(k))
            self.text.tag_bind(name, "<Enter>", lambda _: self.text.configure(cursor="hand2"))
            self.text.tag_bind(name, "<Leave>", lambda _: self.text.configure(cursor="arrow"))
        if not self.spots:
            self.text.insert("end", *self._nothing())
        self.text.configure(state="disabled")

    def _nothing(self):
        session = self.session
        if not session.open:
            return "", ()
        if not session.now.done:
            return "Reading\u2026", ()
        if session.fault is not None:
            return "!  Not read yet. What is needed stands beside the field on the left.", ("alert",)
        return "\u2713  Nothing to review: the tool is sure of this reading.", ("calm",)

    def step(self, step):
        """Choose the next, the one before, or the same again."""
        if self.spots:
            k = (0 if self.at is None else self.at + step) % len(self.spots)
            self.choose(k)
        return "break"

    def choose(self, k):
        """Lead to the place of a reason."""
        self.at = k
        self.text.tag_remove("chosen", "1.0", "end")
        first, last = self.text.tag_ranges(f"item{k}")[0], self.text.tag_ranges(f"item{k}")[-1]
        self.text.tag_add("chosen", first, last)
        self.text.tag_raise("number", "chosen")
        self.text.see(first)
        self.window.lead_to(self.spots[k][1])


def plain(sentence):
    """A reason without its code, which is for records."""
    words = sentence.split(": ", 1)[-1]
    return words[:1].upper() + words[1:]
