"""The figures of several tables side by side, as text, CSV or JSON values."""

import csv
import io
import math

from .caution import CAUTION, CAUTION_SHORT
from .figures import FIGURES

__all__ = ["figures_csv", "figures_json", "figures_text"]

FORMAT = "digitise-figures/1"
ASSUMED = (
    "errors are half-widths of 95 % intervals from the tables' own errors, partly common to all rows and "
    "partly not; levels of lobes and nulls are relative to the main lobe's peak; right is where bearings grow"
)
CSV_COLUMNS = (
    "table",
    "figure",
    "value",
    "error95",
    "unit",
    "bound",
    "at_deg",
    "note",
    "reason",
    "claim",
    "verdict",
)


def figures_text(names, figures, verdicts):
    """Lines of a text table, one column a table, with reasons and notes under it.

    Parameters
    ----------
    names : of the tables, in order; figures : their `Figures`; verdicts : their `Verdict` tuples, maybe empty

    """
    said = []
    rows = [["", *names]]
    for key, (title, unit) in FIGURES.items():
        cells = [_cell(item[key], said) for item in figures]
        rows.append([f"{title}, {unit}", *cells])
    widths = [max(len(row[k]) for row in rows) for k in range(len(rows[0]))]
    for row in rows:
        cells = [cell.rjust(width) for cell, width in zip(row[1:], widths[1:], strict=True)]
        yield "  ".join([row[0].ljust(widths[0]), *cells]).rstrip()
    yield ""
    for number, sentence in enumerate(said, 1):
        yield f"({number}) {sentence}"
    for name, found in zip(names, verdicts, strict=True):
        for item in found:
            yield f"{name}: {item.verdict}: {item.sentence}"
    yield f"The {ASSUMED}."
    yield CAUTION_SHORT


def figures_csv(names, figures, verdicts):
    """CSV text, one row a figure of a table."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(CSV_COLUMNS)
    for name, found, judged in zip(names, figures, verdicts, strict=True):
        claims = {item.key: [one for one in judged if one.claim.key == item.key] for item in found}
        for item in found:
            value, error = ("", "") if item.absent else item.rounded()
            at_deg = f"{item.at_deg:.2f}" if math.isfinite(item.at_deg) else ""
            held = [
                "; ".join(words)
                for words in (
                    [one.claim.text for one in claims[item.key]],
                    [one.verdict for one in claims[item.key]],
                )
            ]
            row = (name, item.key, value, error, item.unit, item.bound, at_deg, item.note, item.reason)
            writer.writerow(
                [_no_formula(cell) if k in (0, 9) else cell for k, cell in enumerate((*row, *held))]
            )
    return out.getvalue()


def figures_json(names, figures, verdicts):
    """Plain values for JSON."""
    tables = []
    for name, found, judged in zip(names, figures, verdicts, strict=True):
        node = {"table": name, "figures": found.to_json()}
        if judged:
            node["claims"] = [
                {"claim": item.claim.text, "verdict": item.verdict, "because": item.sentence}
                for item in judged
            ]
        tables.append(node)
    return {"format": FORMAT, "caution": CAUTION, "assumed": ASSUMED, "tables": tables}


def _cell(item, said):
    """One figure in a few letters, with the number of what is said about it under the table."""
    if item.absent:
        return f"-{_number(item.reason, said)}"
    value, error = item.rounded()
    bound = {"at least": ">= ", "at most": "<= "}.get(item.bound, "")
    at = f" at {item.at_deg:.1f}" if math.isfinite(item.at_deg) else ""
    note = _number(item.note, said) if item.note else ""
    return f"{bound}{value} +- {error}{at}{note}"


def _number(sentence, said):
    if sentence not in said:
        said.append(sentence)
    return f" ({said.index(sentence) + 1})"


def _no_formula(text):
    """File names must not be taken for formulas by a spreadsheet."""
    return f"'{text}" if text[:1] in ("=", "+", "-", "@") else text
