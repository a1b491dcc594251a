"""The desktop window (tkinter only); started by `digitise window` or `python -m gui`."""
