"""What a reading leaves on disk: file names, and writing them whole or not at all.

For a picture `panel.png`: `panel.csv`, `panel.record.json`, `panel.proof.png`; with several traces
`panel.1.csv`, `panel.2.csv` ...; with several charts on the picture the stem becomes `panel-1`, `panel-2` ...
`panel.proof.pdf` stands beside them where it is asked for.

All files of one picture are written under passing names in the same folder and renamed only when every one of
them is there; when a rename fails, what was renamed is undone. A file that is in the way is replaced only
when it belongs to an earlier reading of the same picture name, as the record beside it says; anything else is
refused.
"""

import contextlib
import os
import re
import secrets
from dataclasses import dataclass
from pathlib import Path

from .exceptions import DigitiseError, UsageError
from .record import make_record, read_record, write_record
from .table import write_table

__all__ = [
    "ChartFiles",
    "Written",
    "chart_stem",
    "check_folder",
    "check_stems",
    "make_files",
    "write_file",
    "write_whole",
]


@dataclass(frozen=True, kw_only=True)
class ChartFiles:
    """One chart's files before they are written: the stem they share, name -> bytes, and the record."""

    stem: str
    record: dict
    files: dict


@dataclass(frozen=True, kw_only=True)
class Written:
    """What was written for one picture.

    paths : tuple of Path
    replaced : tuple of names that an earlier reading had left and that were replaced
    left_over : tuple of table names of the earlier reading that the new one has no use for, and that still
        stand
    other_picture : True when the earlier reading was of a picture with other content
    """

    paths: tuple
    replaced: tuple = ()
    left_over: tuple = ()
    other_picture: bool = False


def chart_stem(path, *, chart_number=1, n_charts=1):
    """The stem of one chart's files: the picture's own, with the chart's number when there are several."""
    stem = Path(path).stem
    return f"{stem}-{chart_number}" if n_charts > 1 else stem


def make_files(readings, *, with_proof=True, with_proof_pdf=False):
    """The files of every chart of one picture, as a list of `ChartFiles`.

    Parameters
    ----------
    readings : tuple of Reading, charts of one picture in reading order
    with_proof : draw the proofs too, which take most of the time
    with_proof_pdf : and as PDF pages
    """
    from .proof import draw_proof, encode_proof

    charts = []
    for reading in readings:
        stem = chart_stem(reading.picture.path, chart_number=reading.number, n_charts=reading.n_charts)
        tables = _table_names(stem, len(reading.traces))
        record = make_record(reading, tables=tables)
        files = {
            name: write_table(trace.table).encode()
            for name, trace in zip(tables, reading.traces, strict=True)
        }
        files[f"{stem}.record.json"] = write_record(record).encode()
        if with_proof:
            files[f"{stem}.proof.png"] = encode_proof(draw_proof(reading, record))
        if with_proof_pdf:
            from .proof_pdf import proof_pdf

            files[f"{stem}.proof.pdf"] = proof_pdf(reading, record)
        charts.append(ChartFiles(stem=stem, record=record, files=files))
    return charts


def check_stems(paths):
    """Refuse two pictures whose files would have the same names; raises `UsageError`."""
    first = {}
    for path in paths:
        # Some file systems do not tell case apart.
        other = first.setdefault(chart_stem(path).casefold(), path)
        if other is not path:
            raise UsageError(
                f"its files would take the names of those of {other}",
                remedy="read them in two runs with different --out",
                stage="outputs",
                source=os.fspath(path),
            )


def check_folder(folder):
    """Refuse early a folder that nothing can be written to; raises `UsageError`. Nothing is made yet."""
    at = Path(folder).absolute()
    try:
        while not at.exists():
            at = at.parent
        if not at.is_dir():
            raise _not_written(folder, f"{at} is not a folder")
        if not os.access(at, os.W_OK | os.X_OK):
            raise _not_written(folder, f"{at} may not be written to")
    except (OSError, ValueError) as error:
        raise _not_written(folder, getattr(error, "strerror", None) or str(error)) from None


def write_whole(charts, folder, *, taken=()):
    """Write the files of one picture into a folder, all of them or none.

    Parameters
    ----------
    charts : list of ChartFiles
    folder : made when it is not there
    taken : names already written in the same run for other pictures, which are refused

    Returns `Written`; raises `UsageError` and leaves the folder as it was.
    """
    folder = Path(folder)
    files = {name: data for chart in charts for name, data in chart.files.items()}
    folded = {name.casefold() for name in taken}
    for name in files:
        if name.casefold() in folded:
            raise UsageError(
                f"{name} was already written for another picture of this run",
                remedy="read them in two runs with different --out",
                stage="outputs",
            )
    before = [_in_the_way(chart, folder) for chart in charts]
    token = secrets.token_hex(4)
    waiting, made = [], []
    try:
        _make_folder(folder, made)
        for name, data in files.items():
            waiting.append(folder / f".{name}.{token}.part")
            with open(waiting[-1], "xb") as file:
                file.write(data)
        _rename_all([(part, folder / name) for part, name in zip(waiting, files, strict=True)], token)
    except BaseException as error:
        for part in waiting:
            with contextlib.suppress(OSError, ValueError):
                part.unlink(missing_ok=True)
        for empty in made:
            with contextlib.suppress(OSError):  # someone else has used it since
                empty.rmdir()
        if isinstance(error, (OSError, ValueError)):
            raise _not_written(folder, getattr(error, "strerror", None) or str(error)) from None
        raise
    return Written(
        paths=tuple(folder / name for name in files),
        replaced=tuple(name for replaced, _, _ in before for name in replaced),
        left_over=tuple(name for _, left_over, _ in before for name in left_over),
        other_picture=any(other for _, _, other in before),
    )


def write_file(path, data, *, keep=()):
    """Write one file that the user named, whole or not at all, over what was there.

    `keep` names files that must not be written over (the pictures read); raises `UsageError`.
    """
    path = Path(path)
    part = path.with_name(f".{path.name}.{secrets.token_hex(4)}.part")
    try:
        if any(path.exists() and os.path.samefile(path, other) for other in keep):
            raise _in_way(path, "is the picture itself")
        if path.is_dir():
            raise _in_way(path, "is a folder")
        with open(part, "xb") as file:
            file.write(data)
        os.replace(part, path)
    except (OSError, ValueError) as error:
        with contextlib.suppress(OSError, ValueError):
            part.unlink(missing_ok=True)
        raise _not_written(path, getattr(error, "strerror", None) or str(error)) from None


def _make_folder(folder, made):
    """Make a folder and its parents; puts those that were made into `made`, innermost first."""
    missing = [at for at in (folder, *folder.parents) if not at.exists()]
    for at in reversed(missing):
        at.mkdir(exist_ok=True)
        made.insert(0, at)


def _rename_all(moves, token):
    """Put every (from, to) in place; on any failure put back what was there before."""
    kept = [target.with_name(f".{target.name}.{token}.old") for _, target in moves]
    try:
        for (part, target), old in zip(moves, kept, strict=True):
            if os.path.lexists(target):
                os.rename(target, old)
            os.rename(part, target)
    except BaseException:
        for (part, target), old in zip(moves, kept, strict=True):
            if not os.path.lexists(part):
                os.rename(target, part)
            if os.path.lexists(old):
                os.rename(old, target)
        raise
    for old in kept:
        old.unlink(missing_ok=True)


def _in_the_way(chart, folder):
    """What stands where one chart's files go: names to replace, tables left over, another picture or not."""
    standing = [name for name in chart.files if os.path.lexists(folder / name)]
    own = f"{chart.stem}.record.json"
    try:
        earlier = read_record(folder / own) if os.path.lexists(folder / own) else None
    except DigitiseError:
        earlier = None
    if earlier is None:
        if standing:
            raise _in_way(folder / standing[0], "is there already and belongs to no earlier reading")
        return [], [], False
    new, old = chart.record["chart"], earlier["chart"]
    if (old["file"], old.get("page")) != (new["file"], new["page"]):
        page = f", page {old['page']}" if old.get("page") else ""
        raise _in_way(folder / own, f"holds the reading of another picture ({old['file']}{page})")
    tables = {trace["table"] for trace in earlier["traces"]}
    belong = tables | {own, f"{chart.stem}.proof.png", f"{chart.stem}.proof.pdf"}
    for name in standing:
        if name not in belong or (folder / name).is_dir():
            raise _in_way(folder / name, "is there already and belongs to no earlier reading")
    # A record may name anything: only what such a name can be is looked for, and here only.
    numbered = re.compile(re.escape(chart.stem) + r"(\.[0-9]+)?\.csv")
    left_over = [name for name in sorted(tables) if numbered.fullmatch(name) and name not in chart.files]
    left_over = [name for name in left_over if (folder / name).is_file()]
    return standing, left_over, old["sha256"] != new["sha256"]


def _table_names(stem, n_traces):
    return [f"{stem}.csv"] if n_traces == 1 else [f"{stem}.{k}.csv" for k in range(1, n_traces + 1)]


def _in_way(path, said):
    return UsageError(said, remedy="move it away or name another place", stage="outputs", source=str(path))


def _not_written(folder, said):
    return UsageError(
        f"cannot be written ({said})",
        remedy="name a place that may be written to",
        stage="outputs",
        source=os.fspath(folder),
    )
