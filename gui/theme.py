"""The look of the window: one light set of colours, fonts that grow with the scaling, ttk styles.

Colours carry no meaning alone: a state has its dash or shape, a fault its word. Text keeps 4.5 : 1 to its
ground, and what must be told apart in a view keeps 3 : 1 (W3C WCAG 2.1, 1.4.3 and 1.4.11).
"""

import tkinter as tk
from tkinter import font as tkfont
from tkinter import ttk

__all__ = ["COLOURS", "Look"]

COLOURS = {
    "ground": "#eef0f2",
    "paper": "#ffffff",
    "panel": "#f7f8f9",
    "rule": "#c6ccd3",
    "text": "#18202a",
    "dim": "#56606c",
    "accent": "#00594f",
    "accent-soft": "#d5e8e4",
    "alert": "#9a3800",
    "alert-soft": "#fbe9df",
    "press": "#dfe3e7",
    "focus": "#0a6ecb",
    "mark": "#7a1fa2",
    "pin": "#b3005e",
}
FAMILIES = ("Noto Sans", "Segoe UI", "Helvetica Neue", "DejaVu Sans", "Liberation Sans", "Helvetica")
FIXED = ("Noto Sans Mono", "Consolas", "Menlo", "DejaVu Sans Mono", "Liberation Mono", "Courier")
SIZE_PT = 10


class Look:
    """Colours, fonts and lengths of one window.

    percent : scaling; px(n) : screen px of a design px, which is a px at 100 %
    """

    def __init__(self, root, percent=None):
        self.root = root
        if percent is None:
            percent = max(100, 25 * round(root.winfo_fpixels("1i") / 96 * 4))
        self.percent = percent
        self.unit = percent / 100
        root.tk.call("tk", "scaling", 96 / 72 * self.unit)
        there = set(tkfont.families(root))
        family = next((name for name in FAMILIES if name in there), "TkDefaultFont")
        fixed = next((name for name in FIXED if name in there), "TkFixedFont")
        self.fonts = {
            "text": tkfont.Font(root, family=family, size=SIZE_PT),
            "small": tkfont.Font(root, family=family, size=SIZE_PT - 1),
            "bold": tkfont.Font(root, family=family, size=SIZE_PT, weight="bold"),
            "title": tkfont.Font(root, family=family, size=SIZE_PT + 6),
            "fixed": tkfont.Font(root, family=fixed, size=SIZE_PT),
        }
        self._styles()

    def px(self, n):
        """Screen px of a design px."""
        return max(1, round(n * self.unit)) if n else 0

    def _styles(self):
        c, fonts, px = COLOURS, self.fonts, self.px
        self.root.configure(background=c["ground"])
        style = ttk.Style(self.root)
        style.theme_use("clam")
        style.configure(
            ".", background=c["ground"], foreground=c["text"], font=fonts["text"], bordercolor=c["rule"],
            lightcolor=c["ground"], darkcolor=c["ground"], troughcolor=c["ground"], focuscolor=c["focus"],
            selectbackground=c["accent"], selectforeground=c["paper"], insertcolor=c["text"], relief="flat",
        )  # fmt: skip
        style.configure("Panel.TFrame", background=c["panel"])
        for name, options in {
            "TLabel": {},
            "Dim.TLabel": {"foreground": c["dim"], "font": fonts["small"]},
            "Bold.TLabel": {"font": fonts["bold"]},
            "Title.TLabel": {"font": fonts["title"]},
            "Panel.TLabel": {"background": c["panel"]},
            "PanelDim.TLabel": {"background": c["panel"], "foreground": c["dim"], "font": fonts["small"]},
            "PanelBold.TLabel": {"background": c["panel"], "font": fonts["bold"], "foreground": c["accent"]},
            "Fault.TLabel": {"background": c["panel"], "foreground": c["alert"], "font": fonts["small"]},
            "Alert.TLabel": {"foreground": c["alert"]},
            "Calm.TLabel": {"foreground": c["accent"]},
            "Fixed.TLabel": {"font": fonts["fixed"]},
        }.items():
            style.configure(name, **options)
        button = {
            "padding": (px(9), px(3)),
            "borderwidth": 1,
            "background": c["paper"],
            "lightcolor": c["paper"],
        }
        button |= {"darkcolor": c["paper"], "anchor": "center", "width": -1}
        style.configure("TButton", **button)
        style.configure("Small.TButton", **(button | {"padding": (px(5), 0), "font": fonts["small"]}))
        style.configure(
            "Main.TButton",
            **(button | {"background": c["accent"], "foreground": c["paper"], "bordercolor": c["accent"]}),
        )
        style.configure("Main.TButton", lightcolor=c["accent"], darkcolor=c["accent"])
        ground = [("disabled", c["ground"]), ("pressed", c["press"]), ("active", c["accent-soft"])]
        ink = [("disabled", "#8a929b")]
        for name in ("TButton", "Small.TButton"):
            style.map(
                name, background=ground, lightcolor=ground, darkcolor=ground, foreground=ink,
                bordercolor=[("focus", c["focus"])],
            )  # fmt: skip
        dark = [("disabled", c["press"]), ("pressed", "#003f38"), ("active", "#00705f")]
        style.map(
            "Main.TButton", background=dark, lightcolor=dark, darkcolor=dark, foreground=ink,
            bordercolor=[("focus", c["focus"]), ("disabled", c["rule"])],
        )  # fmt: skip
        style.configure(
            "Tool.Toolbutton", padding=(px(8), px(5)), borderwidth=1, anchor="w", background=c["ground"]
        )
        style.configure(
            "Tab.Toolbutton", padding=(px(10), px(4)), borderwidth=1, anchor="center", background=c["ground"]
        )
        chosen = [("selected", c["accent"]), ("active", c["accent-soft"])]
        for name in ("Tool.Toolbutton", "Tab.Toolbutton"):
            style.map(
                name,
                background=chosen,
                lightcolor=chosen,
                darkcolor=chosen,
                relief=[("selected", "flat")],
                foreground=[("disabled", "#8a929b"), ("selected", c["paper"])],
                bordercolor=[("focus", c["focus"])],
            )
        field = {
            "fieldbackground": c["paper"],
            "padding": (px(4), px(2)),
            "lightcolor": c["paper"],
            "borderwidth": 1,
        }
        for name in ("TEntry", "TCombobox", "TSpinbox"):
            style.configure(name, **field, arrowsize=px(12), arrowcolor=c["dim"])
            style.map(
                name, bordercolor=[("focus", c["focus"])], lightcolor=[("focus", c["focus"])],
                fieldbackground=[("disabled", c["ground"]), ("readonly", c["paper"])],
                foreground=[("disabled", "#8a929b")], selectbackground=[("readonly", c["paper"])],
                selectforeground=[("readonly", c["text"])],
            )  # fmt: skip
            style.configure(f"Wrong.{name}", **field, bordercolor=c["alert"], arrowsize=px(12))
            style.map(
                f"Wrong.{name}", bordercolor=[("focus", c["alert"])], lightcolor=[("focus", c["alert"])]
            )
        for name in ("TCheckbutton", "TRadiobutton"):
            style.configure(
                f"Panel.{name}",
                background=c["panel"],
                indicatorsize=px(11),
                indicatormargin=(0, 0, px(5), 0),
                indicatorbackground=c["paper"],
                padding=(0, px(1)),
                upperbordercolor=c["dim"],
                lowerbordercolor=c["dim"],
            )
            style.map(
                f"Panel.{name}",
                background=[("active", c["accent-soft"])],
                indicatorforeground=[("selected", c["accent"])],
                indicatorbackground=[("selected", c["paper"])],
            )
        style.configure("TNotebook", borderwidth=0, background=c["ground"], tabmargins=(0, 0, 0, 0))
        style.configure(
            "TNotebook.Tab", padding=(px(10), px(3)), background=c["ground"], bordercolor=c["rule"]
        )
        style.map(
            "TNotebook.Tab",
            background=[("selected", c["paper"])],
            lightcolor=[("selected", c["paper"])],
            padding=[("selected", (px(10), px(3)))],
            foreground=[("!selected", c["dim"])],
        )
        row = fonts["text"].metrics("linespace") + px(4)
        style.configure(
            "Treeview", background=c["paper"], fieldbackground=c["paper"], rowheight=row, borderwidth=0
        )
        style.configure(
            "Treeview.Heading", font=fonts["small"], background=c["ground"], padding=(px(4), px(2))
        )
        style.map(
            "Treeview", background=[("selected", c["accent-soft"])], foreground=[("selected", c["text"])]
        )
        for name in ("Vertical.TScrollbar", "Horizontal.TScrollbar"):
            style.configure(
                name,
                background="#b9c0c8",
                arrowsize=px(11),
                bordercolor=c["ground"],
                gripcount=0,
                width=px(11),
                arrowcolor=c["dim"],
            )
            style.map(name, background=[("active", c["dim"]), ("disabled", c["ground"])])
        for pattern, value in (
            ("*TCombobox*Listbox.font", fonts["text"]),
            ("*TCombobox*Listbox.background", c["paper"]),
            ("*TCombobox*Listbox.foreground", c["text"]),
            ("*TCombobox*Listbox.selectBackground", c["accent"]),
            ("*TCombobox*Listbox.selectForeground", c["paper"]),
            ("*Menu.font", fonts["text"]),
            ("*Menu.background", c["panel"]),
            ("*Menu.foreground", c["text"]),
            ("*Menu.activeBackground", c["accent"]),
            ("*Menu.activeForeground", c["paper"]),
            ("*Menu.relief", "flat"),
            ("*Menu.borderWidth", 0),
            ("*Menu.activeBorderWidth", px(2)),
            ("*Dialog*background", c["ground"]),
        ):
            self.root.option_add(pattern, value)


def toplevel(parent, title, look):
    """A plain window over another one, in our ground colour, closed by Escape."""
    top = tk.Toplevel(parent)
    top.title(title)
    top.configure(background=COLOURS["ground"], padx=look.px(16), pady=look.px(14))
    top.transient(parent)
    top.bind("<Escape>", lambda _: top.destroy())
    return top
