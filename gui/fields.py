"""What the user may tell of a chart, as fields: each with its fault beside it, and what the tool found."""

import tkinter as tk
from tkinter import ttk

from .field import FAULT_PX, Field, write
from .found_words import found_words
from .specs import SPECS
from .told_list import ToldList, TraceList
from .words import fault_field, said

__all__ = ["Fields"]

WIDTH_PX = 252


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
        self.canvas.bind(
            "<Configure>", lambda event: self.canvas.itemconfigure(self._item, width=event.width)
        )
        self._row = 0
        self.fields, self.found, self.lists = {}, {}, {}
        self._build()
        self._bind_wheel(self)

    def _build(self):
        self._title("Levels")
        self._fields("outer", "centre", "law", "ring-levels")
        self._list("mark", "Marks")
        self._found("scale")
        self._title("Bearing")
        self._fields("zero", "turn", "step")
        self._found("bearing")
        self._title("Traces")
        self.inks = TraceList(self, self._next_row())
        self.fault_of_inks = self._fault_label()
        self._list("pin", "Pins")
        self._list("cover", "Covers")
        self._title("Grid")
        self._found("grid")
        actions = self.window.actions
        self.grid_buttons = self._buttons(
            ("Settle", actions.settle_grid),
            ("As found", actions.grid_as_found),
            ("Place anew", actions.place_grid_anew),
        )
        self.fault_of_grid = self._fault_label()
        self._title("Part of the picture")
        self._fields("crop")

    # --- rows

    def _next_row(self, step=1):
        self._row += step
        return self._row - step

    def _title(self, words):
        row = self._next_row()
        pad = (self.look.px(10 if row else 0), self.look.px(2))
        label = ttk.Label(self.body, text=words, style="PanelBold.TLabel")
        label.grid(row=row, column=0, columnspan=3, sticky="w", pady=pad)

    def _fields(self, *names):
        for name in names:
            self.fields[name] = Field(self, self._next_row(2), SPECS[name])

    def _list(self, kind, title):
        self.lists[kind] = ToldList(self, self._next_row(2), kind, title)

    def _found(self, name):
        label = ttk.Label(
            self.body, style="PanelDim.TLabel", wraplength=self.look.px(FAULT_PX), justify="left"
        )
        label.grid(row=self._next_row(), column=0, columnspan=3, sticky="w", pady=(self.look.px(2), 0))
        self.found[name] = label

    def _fault_label(self):
        label = ttk.Label(self.body, style="Fault.TLabel", wraplength=self.look.px(FAULT_PX), justify="left")
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

    # --- scrolling

    def _scrolled(self, first, last):
        self.bar.set(first, last)
        if float(first) <= 0 and float(last) >= 1:
            self.bar.pack_forget()
        else:
            self.bar.pack(side="right", fill="y", before=self.canvas)

    def _bind_wheel(self, widget):
        """Let the wheel scroll the panel, and the keyboard bring its widget into sight."""
        widget.bind("<Button-4>", lambda _: self.canvas.yview_scroll(-2, "units"), add="+")
        widget.bind("<Button-5>", lambda _: self.canvas.yview_scroll(2, "units"), add="+")
        widget.bind("<MouseWheel>", self._wheel, add="+")
        widget.bind("<FocusIn>", lambda event: self._see(event.widget), add="+")
        for child in widget.winfo_children():
            self._bind_wheel(child)

    def _wheel(self, event):
        self.canvas.yview_scroll(-1 if event.delta > 0 else 1, "units")

    def _see(self, widget):
        """Scroll so that the widget with the keyboard is in sight."""
        top = widget.winfo_rooty() - self.body.winfo_rooty()
        height, shown = self.body.winfo_height(), self.canvas.winfo_height()
        first = self.canvas.canvasy(0)
        if height > shown and not first <= top <= first + shown - widget.winfo_height():
            self.canvas.yview_moveto(max(0.0, (top - shown / 3) / height))

    # --- showing

    def refresh(self):
        """Show the session: what is told, what was found, and each fault beside its field."""
        session = self.session
        for name, field in self.fields.items():
            field.refresh()
            field.enable(session.chart is not None or (name == "crop" and session.open))
        for part in (*self.lists.values(), self.inks):
            part.refresh()
        for name, label in self.found.items():
            write(label, found_words(session, name))
        for button in self.grid_buttons:
            button.state(["!disabled" if session.open else "disabled"])
        self._show_fault(session.fault)

    def _show_fault(self, fault):
        place = fault_field(fault) if fault is not None else ""
        words = said(fault) if fault is not None else ""
        if place == "outer" and not self.session.settings.marks:
            words += "; or mark two rings with the tool Mark"
        if place in self.fields and not self.fields[place].own_fault:
            self.fields[place].say(words)
        for name, part in self.lists.items():
            part.say(words if place == name else "")
        write(self.fault_of_inks, words if place == "ink" else "")
        write(self.fault_of_grid, words if place in ("grid", "page") else "")

    def held_changed(self):
        """Show which mark, pin or cover is held."""
        for part in self.lists.values():
            part.refresh()

    def focus_first(self):
        """Give the keyboard to the first field."""
        self.fields["outer"].widget.focus_set()

    def take_back(self, widget):
        """Take back what is being typed in a field and not yet told; False when there is nothing."""
        for field in self.fields.values():
            if field.widget is widget and (field.changed or field.own_fault):
                field.refresh(force=True)
                return True
        return False

    def leave(self):
        """Take in what is still being typed."""
        for field in self.fields.values():
            field.commit()
