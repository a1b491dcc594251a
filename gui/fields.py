"""What the user may tell of a chart, as fields: each with the fault beside it, and under it what the tool took itself."""

import tkinter as tk
from tkinter import ttk

from digitise.exceptions import DigitiseError, UsageError
from digitise.settings import LAWS, ZERO_WORDS

from .found_words import found_words
from .level_text import read_level
from .told_list import TraceList, ToldList
from .words import fault_field, said

__all__ = ["Fields"]

WIDTH_PX = 252
AS_FOUND = "as found"
TURNS = {AS_FOUND: None, "clockwise": "cw", "counter-clockwise": "ccw"}


class Field:
    """One entry or choice: title, widget, unit, and its fault under it.

    read : text -> value, raising `UsageError`; tell : value -> None; show : () -> the text of what is told
    """

    def __init__(self, panel, row, title, unit, *, read, tell, show, choices=None, fixed=False, width=9):
        look = panel.look
        self.read, self.tell, self.show, self.panel = read, tell, show, panel
        self.text = tk.StringVar(panel)
        ttk.Label(panel.body, text=title, style="Panel.TLabel").grid(
            row=row, column=0, sticky="w", pady=look.px(2), padx=(0, look.px(6))
        )
        kind = ttk.Combobox if choices else ttk.Entry
        more = {"values": choices, "state": "readonly" if fixed else "normal"} if choices else {}
        self.kind = "TCombobox" if choices else "TEntry"
        self.widget = kind(panel.body, textvariable=self.text, width=width, font=look.fonts["text"], **more)
        self.widget.grid(row=row, column=1, sticky="ew", pady=look.px(2))
        ttk.Label(panel.body, text=unit, style="PanelDim.TLabel").grid(row=row, column=2, sticky="w", padx=(look.px(4), 0))
        self.fault = ttk.Label(panel.body, style="Fault.TLabel", wraplength=look.px(WIDTH_PX - 20), justify="left")
        self.fault.grid(row=row + 1, column=0, columnspan=3, sticky="w")
        self.fault.grid_remove()
        self.widget.bind("<Return>", lambda _: self.commit())
        self.widget.bind("<KP_Enter>", lambda _: self.commit())
        self.widget.bind("<FocusOut>", lambda _: self.commit())
        self.widget.bind("<Escape>", lambda _: self.refresh(force=True))
        if choices:
            self.widget.bind("<<ComboboxSelected>>", lambda _: self.commit())
            for wheel in ("<MouseWheel>", "<Button-4>", "<Button-5>"):
                self.widget.bind(wheel, lambda _: "break")  # scrolling the panel must not change a choice
        self.own_fault = ""

    def refresh(self, *, force=False):
        """Show what is told, unless something wrong or unfinished stands there."""
        if force:
            self.own_fault = ""
        if not self.own_fault and (force or self.widget.focus_displayof() is not self.widget or not self.changed):
            self.text.set(self.show())
        self.say(self.own_fault)

    @property
    def changed(self):
        """Whether the text is other than what is told."""
        return self.text.get().strip() != self.show()

    def commit(self):
        """Tell what was typed; what is wrong with it is said beside the field."""
        if not self.changed and not self.own_fault:
            return
        try:
            self.own_fault = ""
            if self.changed:
                self.tell(self.read(self.text.get().strip()))
        except DigitiseError as error:
            self.own_fault = said(error)
            self.say(self.own_fault)
            return
        self.panel.window.changed()

    def say(self, words):
        """Write a fault under the field, or take it away."""
        _write(self.fault, words)
        self.widget.configure(style=f"Wrong.{self.kind}" if words else self.kind)


class Fields(ttk.Frame):
    """The panel of fields, scrolled when it is taller than the window."""

    def __init__(self, parent, window):
        super().__init__(parent, style="Panel.TFrame")
        self.window, self.session, self.look = window, window.session, window.look
        px = self.look.px
        self.canvas = tk.Canvas(
            self, width=px(WIDTH_PX), highlightthickness=0, background=window.colours["panel"], borderwidth=0
        )
        self.bar = ttk.Scrollbar(self, orient="vertical", command=self.canvas.yview)
        self.canvas.configure(yscrollcommand=self._scrolled)
        self.canvas.pack(side="left", fill="both", expand=True)
        self.body = ttk.Frame(self.canvas, style="Panel.TFrame", padding=(px(10), px(6), px(8), px(10)))
        self.body.columnconfigure(1, weight=1)
        self._item = self.canvas.create_window(0, 0, window=self.body, anchor="nw")
        self.body.bind("<Configure>", lambda _: self.canvas.configure(scrollregion=self.canvas.bbox("all")))
        self.canvas.bind("<Configure>", lambda event: self.canvas.itemconfigure(self._item, width=event.width))
        self._row = 0
        self.fields, self.found = {}, {}
        self._build()
        self._bind_wheel(self)
        self.bind_class("Fields", "<FocusIn>", lambda _: None)

    def _scrolled(self, first, last):
        self.bar.set(first, last)
        if float(first) <= 0 and float(last) >= 1:
            self.bar.pack_forget()
        else:
            self.bar.pack(side="right", fill="y", before=self.canvas)

    def _bind_wheel(self, widget):
        """The wheel scrolls the panel wherever the pointer stands on it."""
        widget.bind("<Button-4>", lambda _: self.canvas.yview_scroll(-2, "units"), add="+")
        widget.bind("<Button-5>", lambda _: self.canvas.yview_scroll(2, "units"), add="+")
        widget.bind("<MouseWheel>", lambda event: self.canvas.yview_scroll(-1 if event.delta > 0 else 1, "units"), add="+")
        widget.bind("<FocusIn>", lambda event: self._see(event.widget), add="+")
        for child in widget.winfo_children():
            self._bind_wheel(child)

    def _see(self, widget):
        """Scroll so that the widget with the keyboard is in sight."""
        top = widget.winfo_rooty() - self.body.winfo_rooty()
        height, shown = self.body.winfo_height(), self.canvas.winfo_height()
        if height <= shown:
            return
        first = self.canvas.canvasy(0)
        if top < first or top + widget.winfo_height() > first + shown:
            self.canvas.yview_moveto(max(0.0, (top - shown / 3) / height))

    def _build(self):
        session = self.session
        self._title("Levels")
        self._field("outer", "Outermost ring", "dB", self._level, lambda v: self._levels(outer_db=v), "outer_db")
        self._field("centre", "Centre", "dB", self._level, lambda v: self._levels(centre_db=v), "centre_db")
        self._choice("law", "Law", (AS_FOUND, *LAWS), lambda text: None if text == AS_FOUND else text, session.tell_law, "law")
        self._field(
            "ring-levels", "Ring levels", "dB", self._level_list, lambda v: self._levels(ring_levels=v), "ring_levels"
        )
        self.marks = self._list("mark", "Marks")
        self._found("scale")
        self._title("Bearing")
        zero = (AS_FOUND, *ZERO_WORDS)
        self._choice("zero", "0\u00b0 at", zero, self._zero, self._tell_zero, "zero_deg", fixed=False, unit="\u00b0")
        self._choice("turn", "Angles grow", tuple(TURNS), TURNS.get, self._tell_turn, "turn")
        self._field("step", "Step", "\u00b0", self._step, lambda v: session.tell(f"step {v:g}\u00b0", step_deg=v), "step_deg")
        self._found("bearing")
        self._title("Traces")
        self.inks = TraceList(self, self._next_row())
        self.fault_of_inks = self._fault_label()
        self.pins = self._list("pin", "Pins")
        self.covers = self._list("cover", "Covers")
        self._title("Grid")
        self._found("grid")
        self.grid_buttons = self._buttons(
            ("Settle", self.window.actions.settle_grid),
            ("As found", self.window.actions.grid_as_found),
            ("Place anew", self.window.actions.place_grid_anew),
        )
        self.fault_of_grid = self._fault_label()
        self._title("Part of the picture")
        self._field("crop", "Crop", "px", self._box, session.tell_crop, "crop", width=16)

    # --- rows ------------------------------------------------------------------------------------------------

    def _next_row(self, step=1):
        self._row += step
        return self._row - step

    def _title(self, words):
        row = self._next_row()
        pad = (self.look.px(10 if row else 0), self.look.px(2))
        ttk.Label(self.body, text=words, style="PanelBold.TLabel").grid(row=row, column=0, columnspan=3, sticky="w", pady=pad)

    def _field(self, name, title, unit, read, tell, setting, *, width=9):
        self.fields[name] = Field(
            self, self._next_row(2), title, unit, read=read, tell=tell, show=lambda: self._shown(setting), width=width
        )

    def _choice(self, name, title, choices, read, tell, setting, *, fixed=True, unit=""):
        self.fields[name] = Field(
            self, self._next_row(2), title, unit, read=read, tell=tell, show=lambda: self._shown(setting),
            choices=choices, fixed=fixed,
        )  # fmt: skip

    def _list(self, kind, title):
        return ToldList(self, self._next_row(2), kind, title)

    def _found(self, name):
        label = ttk.Label(
            self.body, style="PanelDim.TLabel", wraplength=self.look.px(WIDTH_PX - 24), justify="left"
        )
        label.grid(row=self._next_row(), column=0, columnspan=3, sticky="w", pady=(self.look.px(2), 0))
        self.found[name] = label

    def _fault_label(self):
        label = ttk.Label(self.body, style="Fault.TLabel", wraplength=self.look.px(WIDTH_PX - 20), justify="left")
        label.grid(row=self._next_row(), column=0, columnspan=3, sticky="w")
        return label

    def _buttons(self, *named):
        frame = ttk.Frame(self.body, style="Panel.TFrame")
        frame.grid(row=self._next_row(), column=0, columnspan=3, sticky="w", pady=(self.look.px(3), 0))
        buttons = []
        for words, act in named:
            button = ttk.Button(frame, text=words, style="Small.TButton", command=act)
            button.pack(side="left", padx=(0, self.look.px(4)))
            buttons.append(button)
        return buttons

    # --- reading and telling ---------------------------------------------------------------------------------

    def _shown(self, setting):
        """What is told, as the text of its field."""
        session = self.session
        value = session.now.template.crop if setting == "crop" else getattr(session.settings, setting)
        if setting == "law":
            return value or AS_FOUND
        if setting == "turn":
            return next(word for word, turn in TURNS.items() if turn == value)
        if setting == "zero_deg":
            words = {deg: word for word, deg in ZERO_WORDS.items()}
            return AS_FOUND if value is None else words.get(value, f"{value:g}")
        if value is None or value == ():
            return ""
        return ", ".join(f"{item:g}" for item in value) if isinstance(value, tuple) else f"{value:g}"

    def _levels(self, **changes):
        (name, value), = changes.items()
        words = {"outer_db": "outermost ring", "centre_db": "centre", "ring_levels": "ring levels"}[name]
        self.session.tell_levels(words if value in (None, ()) or name == "ring_levels" else f"{words} {value:g} dB", **changes)

    def _tell_zero(self, value):
        self.session.tell_bearing("0\u00b0 as found" if value is None else f"0\u00b0 at {value:g}\u00b0", zero_deg=value)

    def _tell_turn(self, value):
        self.session.tell_bearing({"cw": "clockwise", "ccw": "counter-clockwise", None: "turn as found"}[value], turn=value)

    @staticmethod
    def _level(text):
        return read_level(text) if text else None

    @staticmethod
    def _level_list(text):
        return tuple(read_level(part) for part in text.replace(";", ",").split(",") if part.strip())

    @staticmethod
    def _zero(text):
        if text in ("", AS_FOUND):
            return None
        return ZERO_WORDS[text] if text in ZERO_WORDS else read_level(text.removesuffix("\u00b0")) % 360

    @staticmethod
    def _step(text):
        return read_level(text) if text else 1.0

    @staticmethod
    def _box(text):
        parts = [part for part in text.replace(";", ",").split(",") if part.strip()]
        if not parts:
            return None
        if len(parts) != 4:
            raise UsageError("four numbers are needed: left, top, width, height")
        return tuple(read_level(part) for part in parts)

    # --- showing ---------------------------------------------------------------------------------------------

    def refresh(self):
        """Show the session: what is told, what was found, and each fault beside its field."""
        session = self.session
        able = session.chart is not None
        for name, field in self.fields.items():
            field.refresh()
            field.widget.state(["!disabled" if able or (name == "crop" and session.open) else "disabled"])
        for part in (self.marks, self.pins, self.covers, self.inks):
            part.refresh()
        for name, label in self.found.items():
            _write(label, found_words(session, name))
        for button in self.grid_buttons:
            button.state(["!disabled" if session.open else "disabled"])
        self._show_fault(session.fault)

    def _show_fault(self, fault):
        place = fault_field(fault) if fault is not None else ""
        words = said(fault) if fault is not None else ""
        if place in self.fields and not self.fields[place].own_fault:
            self.fields[place].say(words)
        for name, part in (("mark", self.marks), ("pin", self.pins), ("cover", self.covers)):
            part.say(words if place == name else "")
        _write(self.fault_of_inks, words if place == "ink" else "")
        _write(self.fault_of_grid, words if place in ("grid", "page") else "")

    def focus_first(self):
        """Give the keyboard to the first field."""
        self.fields["outer"].widget.focus_set()

    def leave(self):
        """Take in what is still being typed."""
        for field in self.fields.values():
            field.commit()


def _write(label, words):
    """Write on a label, which takes no room while it is empty."""
    label.configure(text=words)
    (label.grid if words else label.grid_remove)()
