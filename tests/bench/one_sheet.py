"""What one sheet costs, as ratios in one run: `python tests/bench/one_sheet.py` prints a small table.

Every comparison is with a plain script that does the same arithmetic, run in the same process (or, for
the cold start, as a process of its own in turns with the other). Medians of several rounds; absolute
times depend on the machine.
"""

from __future__ import annotations

import gc
import math
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import loadpath
from loadpath.document import build
from loadpath.evaluate.evaluate import run_plan
from loadpath.evaluate.plan import make_plan
from loadpath.render.html import render as render_html
from loadpath.resolve import resolve
from loadpath.trace.file import record

MEMBERS = 8
"""Times that the five formulas below stand on the sheet: forty steps."""

HEAD = """---
title: Bench
sources: {s: a source}
---

    P_0 = 20 kN -- [s]
    L = 6 m -- [s]
    w = 0.4 kN/m -- [s]
    W = 557 cm^3 -- [s]
    I = 8356 cm^4 -- [s]
    E = 210 GPa -- [s]
    f_y = 275 MPa -- [s]
"""


def sheet(members: int) -> str:
    lines = [HEAD]
    for i in range(1, members + 1):
        lines += [
            "" if i % 10 else f"\n# Part {i // 10}\n",
            f"    P_{i} = 1.01*P_{i - 1}",
            f"    M_{i} [kN*m] = P_{i}*L/4 + 1.35*w*L^2/8",
            f"    s_{i} [MPa] = M_{i}/W",
            f"    d_{i} [mm] = P_{i}*L^3/(48*E*I) + 5*w*L^4/(384*E*I)",
            f"    u_{i} = sqrt((s_{i}/f_y)^2 + (500*d_{i}/L)^2)",
        ]
    return "\n".join(lines) + "\n"


def plain_floats(members: int) -> float:
    """The same arithmetic, as somebody would write it without an engine."""
    p, length, w, modulus, inertia, e, f_y = 20e3, 6.0, 400.0, 557e-6, 8356e-8, 210e9, 275e6
    u = 0.0
    for _ in range(members):
        p = 1.01 * p
        m = p * length / 4 + 1.35 * w * length**2 / 8
        s = m / modulus
        d = p * length**3 / (48 * e * inertia) + 5 * w * length**4 / (384 * e * inertia)
        u = math.sqrt((s / f_y) ** 2 + (500 * d / length) ** 2)
    return u


def pint_quantities(members: int) -> Callable[[], object]:
    """The same with a quantity of pint at each operation."""
    import pint

    q = pint.UnitRegistry().Quantity
    p0, length, w = q(20.0, "kN"), q(6.0, "m"), q(0.4, "kN/m")
    modulus, inertia, e, f_y = q(557.0, "cm^3"), q(8356.0, "cm^4"), q(210.0, "GPa"), q(275.0, "MPa")

    def work() -> object:
        p, u = p0, None
        for _ in range(members):
            p = 1.01 * p
            m = (p * length / 4 + 1.35 * w * length**2 / 8).to("kN*m")
            s = (m / modulus).to("MPa")
            d = (p * length**3 / (48 * e * inertia) + 5 * w * length**4 / (384 * e * inertia)).to("mm")
            u = ((s / f_y).to("") ** 2 + (500 * d / length).to("") ** 2) ** 0.5
        return u

    return work


def median_time(work: Callable[[], object], rounds: int = 15) -> float:
    """Seconds of one call: the median of rounds of at least 20 ms each."""
    work()
    start = time.perf_counter()
    work()
    times = max(1, int(0.02 / max(time.perf_counter() - start, 1e-7)))
    found = []
    for _ in range(rounds):
        start = time.perf_counter()
        for _ in range(times):
            work()
        found.append((time.perf_counter() - start) / times)
    return statistics.median(found)


def numbers_alone(members: int) -> Callable[[], object]:
    """The compiled plan without a trace."""
    plan = make_plan(resolve(loadpath.read_text(sheet(members))))
    works = [(p.outline.entry.name, p.work) for p in plan.steps if p.work is not None]

    def work() -> object:
        values: dict[str, float] = {}
        for name, number in works:
            values[name] = number(values, {})
        return values

    return work


def cold(arguments: list[str], rounds: int = 7) -> float:
    """Seconds of a whole process."""
    found = []
    for _ in range(rounds):
        start = time.perf_counter()
        subprocess.run([sys.executable, *arguments], check=True, capture_output=True)
        found.append(time.perf_counter() - start)
    return statistics.median(found)


def cold_ratio() -> float:
    """A cold `loadpath issue` of a 40-step sheet over importing the packages it stands on."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "bench.sheet.md"
        path.write_text(sheet(MEMBERS), encoding="utf-8")
        issue = cold(["-m", "loadpath", "issue", str(path), "--out", folder])
        return issue / cold(["-c", "import pint, jinja2, yaml, markdown_it"])


def stages(members: int) -> dict[str, float]:
    """Microseconds a step of each stage."""
    text = sheet(members)
    read = loadpath.read_text(text)
    resolved = resolve(read)
    plan = make_plan(resolved)
    trace = run_plan(plan)
    document = build(trace, "bench")
    works: dict[str, Callable[[], object]] = {
        "read": lambda: loadpath.read_text(text),
        "resolve": lambda: resolve(read),
        "plan": lambda: make_plan(resolved),
        "run": lambda: run_plan(plan),
        "trace file": lambda: record(trace, "bench").to_json(),
        "document": lambda: build(trace, "bench"),
        "html": lambda: render_html(document),
    }
    return {name: median_time(work, 3) / len(trace.steps) * 1e6 for name, work in works.items()}


def main() -> None:
    gc.set_threshold(200_000, 20, 20)  # as the program does
    floats = median_time(lambda: plain_floats(MEMBERS))
    numbers = median_time(numbers_alone(MEMBERS))
    plan = make_plan(resolve(loadpath.read_text(sheet(MEMBERS))))
    trace = median_time(lambda: run_plan(plan))
    quantities = median_time(pint_quantities(MEMBERS))
    print("| a 40-step sheet | ratio | aim |")
    print("|---|---|---|")
    print(f"| numbers alone / plain floats | {numbers / floats:.1f} | at most 15 |")
    print(f"| pint quantities / numbers alone | {quantities / numbers:.0f} | at least 50 |")
    print(f"| numbers with the trace / plain floats | {trace / floats:.0f} | at most 100 |")
    print(
        "| cold `loadpath issue` / importing pint, jinja2, yaml, markdown_it | "
        f"{cold_ratio():.2f} | under 3 |"
    )
    print()
    small, large = stages(20), stages(2000)
    print("| microseconds a step | 107 steps | 10 007 steps | ratio |")
    print("|---|---|---|---|")
    for name in small:
        print(f"| {name} | {small[name]:.0f} | {large[name]:.0f} | {large[name] / small[name]:.2f} |")


if __name__ == "__main__":
    main()
