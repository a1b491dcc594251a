"""Time whole processes on one core, start to files written, by picture size, beside the short script.

Processor time stands beside wall time, since other work on the machine lengthens only the latter.
"""

import os
import subprocess
import sys
import time
from pathlib import Path

import numpy as np

from tests.draw import paint, random_page, write_case

MEGAPIXELS = (0.25, 1.0, 4.0, 16.0)
REPEATS = 3
ONE_CORE = {name: "1" for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "OPENCV_FOR_THREADS_NUM")}
HERE = Path(__file__).parent


def measure_speed(folder, *, megapixels=MEGAPIXELS):
    """Lines of text: seconds, share of imports, peak memory and the short script's time by picture size."""
    lines = ["megapixels   wall s    cpu s  imports  peak MB | short: cpu s  ratio"]
    times = []
    for size in megapixels:
        page, path = _chart(folder, size)
        chart = page.charts[0]
        told = ["--zero", chart.zero, "--turn", chart.turn, f"--ink={chart.traces[0].ink}"]
        told += [f"--outer={chart.outer_db:g}", f"--centre={chart.centre_db:g}"]
        own = [sys.executable, "-m", "digitise", "read", str(path), *told, "--out", str(Path(folder) / "out")]
        short = [
            sys.executable,
            str(HERE / "short_script.py"),
            str(path),
            *told,
            "--out",
            str(Path(folder) / "short.csv"),
        ]
        wall, seconds, peak = _best(own)
        _, beside, _ = _best(short)
        times.append(seconds)
        millions = page.width * page.height / 1e6
        lines.append(
            f"{millions:10.2f} {wall:8.2f} {seconds:8.2f} {_import_share(own):8.0%} {peak:8.0f}"
            f" | {beside:12.2f} {seconds / beside:6.2f}"
        )
    slope = np.polyfit(np.log(megapixels[-2:]), np.log(times[-2:]), 1)[0]
    lines.append(f"growth between the two largest: cpu seconds ~ megapixels^{slope:.2f}")
    return lines


def _chart(folder, size):
    """Write a plain one-trace chart that fills a picture of `size` megapixels."""
    rng = np.random.default_rng(5)
    side = np.sqrt(size * 1e6)
    fixed = {"law": "even", "n_traces": 1, "dashes": ("solid",), "paper": "white", "families": ("measured",)}
    page = random_page(rng, outer_px=side / 3.1, **fixed)
    path = write_case(folder, f"speed-{size:g}", paint(page, renderer="opencv"), ())
    return page, path


def _best(command):
    """Least wall and processor time of a few runs, s, and the largest resident memory, MB."""
    wall, cpu, memory = zip(*[_run(command) for _ in range(REPEATS)], strict=True)
    return min(wall), min(cpu), max(memory)


def _run(command):
    start = time.perf_counter()
    process = subprocess.Popen(
        command, env={**os.environ, **ONE_CORE}, stdout=subprocess.DEVNULL, stderr=subprocess.PIPE, text=True
    )
    said = process.stderr.read()
    process.stderr.close()
    _, status, usage = os.wait4(process.pid, 0)
    process.returncode = os.waitstatus_to_exitcode(status)
    if process.returncode != 0:
        raise RuntimeError(f"exit {process.returncode} of {' '.join(command)}: {said.strip()}")
    return time.perf_counter() - start, usage.ru_utime + usage.ru_stime, usage.ru_maxrss / 1024


def _import_share(command):
    """Share of the process spent importing, the interpreter's own start included (python -X importtime)."""
    start = time.perf_counter()
    run = subprocess.run(
        [command[0], "-X", "importtime", *command[1:]],
        env={**os.environ, **ONE_CORE},
        capture_output=True,
        text=True,
        check=True,
    )
    seconds = time.perf_counter() - start
    spent = 0.0
    for line in run.stderr.splitlines():
        if line.startswith("import time:") and "self" not in line:
            spent += float(line.split(":")[1].split("|")[0]) * 1e-6
    return spent / seconds
