"""The table as tab-separated text, as spreadsheets paste it."""

from digitise.table import write_table

__all__ = ["table_text"]


def table_text(table, rows=None):
    """Header and all rows, or some by their index."""
    head, *lines = write_table(table).splitlines()
    chosen = lines if rows is None else [lines[k] for k in rows]
    return "\n".join(line.replace(",", "\t") for line in [head, *chosen]) + "\n"
