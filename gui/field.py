"""One field: title, entry or choice, unit, and its fault under it."""

import tkinter as tk
from tkinter import ttk

from digitise.exceptions import DigitiseError

from .words import said

__all__ = ["Field", "write"]

FAULT_PX = 232


class Field:
    """The widgets of one `specs.Spec`.

    own_fault : what is wrong with the text itself; a fault of the reading is told by `say`
    """

    def __init__(self, panel, row, spec, *, width=9):
        look, body = panel.look, panel.body
        self.panel, self.session, self.spec = panel, panel.session, spec
        self.own_fault = ""
        self.text = tk.StringVar(panel)
        px = look.px
        ttk.Label(body, text=spec.title, style="Panel.TLabel").grid(
            row=row, column=0, sticky="w", pady=px(2), padx=(0, px(6))
        )
        self.kind = "TCombobox" if spec.choices else "TEntry"
        more = (
            {"values": spec.choices, "state": "readonly" if spec.fixed else "normal"} if spec.choices else {}
        )
        widget = ttk.Combobox if spec.choices else ttk.Entry
        self.widget = widget(body, textvariable=self.text, width=width, font=look.fonts["text"], **more)
        self.widget.grid(row=row, column=1, sticky="ew", pady=px(2))
        ttk.Label(body, text=spec.unit, style="PanelDim.TLabel").grid(
            row=row, column=2, sticky="w", padx=(px(4), 0)
        )
        self.fault = ttk.Label(body, style="Fault.TLabel", wraplength=px(FAULT_PX), justify="left")
        self.fault.grid(row=row + 1, column=0, columnspan=3, sticky="w")
        self.fault.grid_remove()
        for key in ("<Return>", "<KP_Enter>", "<FocusOut>"):
            self.widget.bind(key, lambda _: self.commit())
        self.widget.bind("<Escape>", lambda _: self.refresh(force=True))
        if spec.choices:
            self.widget.bind("<<ComboboxSelected>>", lambda _: self.commit())
            for wheel in ("<MouseWheel>", "<Button-4>", "<Button-5>"):
                self.widget.bind(wheel, lambda _: "break")  # scrolling the panel must not change a choice

    def refresh(self, *, force=False):
        """Show what is told, unless something wrong or unfinished stands there."""
        if force:
            self.own_fault = ""
        typing = self.changed and self.widget.focus_displayof() is self.widget
        if not self.own_fault and (force or not typing):
            self.text.set(self.spec.show(self.session))
        self.say(self.own_fault)

    @property
    def changed(self):
        """Whether the text is other than what is told."""
        return self.text.get().strip() != self.spec.show(self.session)

    def commit(self):
        """Tell what was typed; what is wrong with it is said beside the field."""
        if not self.changed and not self.own_fault:
            return
        try:
            self.own_fault = ""
            if self.changed:
                self.spec.tell(self.session, self.spec.read(self.text.get().strip()))
        except DigitiseError as error:
            self.own_fault = said(error)
            self.say(self.own_fault)
            return
        self.panel.window.changed()

    def say(self, words):
        """Write a fault under the field, or take it away."""
        write(self.fault, words)
        self.widget.configure(style=f"Wrong.{self.kind}" if words else self.kind)

    def enable(self, able):
        """Let it be typed in, or not."""
        self.widget.state(["!disabled" if able else "disabled"])


def write(label, words):
    """Write on a label, which takes no room while it is empty."""
    label.configure(text=words)
    (label.grid if words else label.grid_remove)()
