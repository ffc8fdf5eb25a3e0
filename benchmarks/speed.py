"""Speed against stock SymPy: ``python -m benchmarks.speed PATH --json speed.json --picture speed.png``.

All figures are ratios of processor times measured in one run, with SymPy's cache cleared before every call and the
modules loaded: (1) entries of the list that both integrators solve, (2) the cost of constructing the answer alone,
(3) what a refusal adds to stock, (4) what importing the package adds, (5) growth with the size of the question,
(6) evaluating the closed form against quadrature, both at 50 digits.
"""
from __future__ import annotations

import argparse
import json
import math
import multiprocessing
import os
import statistics
import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import mpmath
import sympy
from sympy import Add, Expr, Mul, Symbol, exp, lambdify, oo, srepr
from sympy.core.cache import clear_cache
from sympy.functions.elementary.piecewise import ExprCondPair
from sympy.functions.special.hyper import TupleArg

from sympy_mellin_ext import closed_form, integrate

from .entries import Entry, load
from .host_integrals import collect
from .scoring import SOLVED, OutOfTime, classify, main_branch, time_limit

X = Symbol("x", positive=True)


def cold(call: Callable[[], Any], rounds: int = 3) -> float:
    """Median processor time of a call with a cold cache, in seconds."""
    times = []
    for _ in range(rounds):
        clear_cache()
        start = time.process_time()
        call()
        times.append(time.process_time() - start)
    return statistics.median(times)


def in_child(work: Callable[..., Any], *arguments: Any) -> Any:
    """The result of ``work`` in a forked process: a hang or a leak stays there; None if it died."""
    context = multiprocessing.get_context("fork")
    ours, theirs = context.Pipe(duplex=False)
    process = context.Process(target=lambda: theirs.send(work(*arguments)), daemon=True)
    process.start()
    theirs.close()
    try:
        return ours.recv()
    except EOFError:
        return None
    finally:
        process.kill()
        process.join()


def compare(entry: Entry, seconds: float) -> dict[str, Any] | None:
    """Ours and stock on one entry, interleaved; None unless both solve it within the limit."""
    answers = []
    for integrator in (integrate, sympy.integrate):
        clear_cache()
        try:
            with time_limit(seconds):
                answers.append(integrator(entry.integrand, *entry.limits))
        except OutOfTime:
            return None
        except Exception:
            return None
    ours: list[float] = []
    stock: list[float] = []
    for _ in range(3):
        ours.append(cold(lambda: integrate(entry.integrand, *entry.limits), 1))
        stock.append(cold(lambda: sympy.integrate(entry.integrand, *entry.limits), 1))
    if any(classify(answer, entry)[0] != SOLVED for answer in answers):
        return None
    code = compile(srepr(answers[0]), entry.name, "eval")
    names = vars(sympy) | {"ExprCondPair": ExprCondPair, "TupleArg": TupleArg}
    construct = cold(lambda: eval(code, dict(names)), 5)  # our own srepr
    a, b = statistics.median(ours), statistics.median(stock)
    return {"id": entry.name, "ours": a, "stock": b, "ratio": b / a, "construct": construct}


def refusal(seconds: float) -> dict[str, Any]:
    """Added time on the integrals of SymPy's own tests that are not ours."""
    added, total = [], 0.0
    for f, limit in collect():
        try:
            if closed_form(f, limit) is not None:
                continue
        except (TypeError, ValueError):  # what SymPy itself has to judge
            continue
        stock = in_child(_stock_time, f, limit, seconds)
        added.append(cold(lambda f=f, limit=limit: closed_form(f, limit)))
        total += seconds if stock is None else stock
    return {"count": len(added), "median": statistics.median(added), "added": sum(added), "stock": total,
            "share": sum(added) / total}


def _stock_time(f: Expr, limit: Any, seconds: float) -> float:
    clear_cache()
    start = time.process_time()
    try:
        with time_limit(seconds):
            sympy.integrate(f, limit)
    except OutOfTime:
        return seconds
    except Exception:
        return time.process_time() - start
    return time.process_time() - start


def import_share(rounds: int = 7) -> dict[str, float]:
    """``import sympy_mellin_ext`` over ``import sympy``, each in fresh processes, interleaved."""
    code = (
        "import time; t = time.process_time(); import sympy; a = time.process_time() - t; "
        "t = time.process_time(); import sympy_mellin_ext; print(a, time.process_time() - t)"
    )
    pairs = []
    for _ in range(rounds):
        done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
        pairs.append([float(v) for v in done.stdout.split()])
    host, own = (statistics.median(p[i] for p in pairs) for i in (0, 1))
    return {"sympy": host, "package": own, "share": own / host}


def growth() -> list[dict[str, Any]]:
    """Time against the number of terms, parameters and factors."""
    table = []
    for n in (1, 10, 50, 100, 200, 500):
        f = Add(*(X * exp(-(Symbol("a", positive=True) + k) * X) for k in range(1, n + 1)))
        table.append({"what": "terms", "n": n, "seconds": cold(lambda f=f: closed_form(f, (X, 0, oo)))})
    for n in (1, 5, 10, 20, 30):
        rates = [Symbol(f"a{k}", positive=True) for k in range(n)]
        f = X * exp(-Add(*rates) * X)
        table.append({"what": "parameters", "n": n, "seconds": cold(lambda f=f: closed_form(f, (X, 0, oo)))})
    for n in (1, 2, 4, 8, 16):
        rates = [Symbol(f"a{k}", positive=True) for k in range(n)]
        f = Mul(*(exp(-r * X) * X**r for r in rates))
        table.append({"what": "factors", "n": n, "seconds": cold(lambda f=f: closed_form(f, (X, 0, oo)))})
    return table


def evaluation(entries: Sequence[Entry], digits: int = 50, most: int = 25) -> list[dict[str, Any]]:
    """Evaluating the closed form at 50 digits against mpmath's quadrature at 50 digits."""
    table = []
    for entry in entries:
        if len(table) >= most:
            break
        if not entry.points or len(entry.limits) != 1 or entry.raw.get("omega"):
            continue
        answer = closed_form(entry.integrand, *entry.limits)
        if answer is None:
            continue
        row = in_child(_evaluate, answer.value, entry, digits)
        if row is not None:
            table.append(row)
    return table


def _evaluate(value: Expr, entry: Entry, digits: int) -> dict[str, Any] | None:
    point, (x, low, high) = entry.points[0], entry.limits[0]
    try:
        with time_limit(30), mpmath.workdps(digits):
            start = time.process_time()
            main_branch(value).evalf(digits, subs=point)
            formula = time.process_time() - start
            g = lambdify(x, entry.integrand.subs(point), "mpmath")
            start = time.process_time()
            mpmath.quad(g, [mpmath.mpf(low), mpmath.inf] if high is oo else [mpmath.mpf(low), mpmath.mpf(high)])
            return {"id": entry.name, "formula": formula, "quadrature": time.process_time() - start}
    except (OutOfTime, ArithmeticError, TypeError, ValueError, NameError):
        return None


def picture(rows: Sequence[dict[str, Any]], path: Path) -> None:
    """Ratio to stock per entry, sorted, on a logarithmic scale (needs matplotlib)."""
    import matplotlib

    matplotlib.use("Agg")
    from matplotlib import pyplot

    ratios = sorted(r["ratio"] for r in rows)
    figure, axes = pyplot.subplots(figsize=(8, 4.2), layout="constrained")
    axes.scatter(range(1, len(ratios) + 1), ratios, s=9, color="#1f5f8b")
    axes.axhline(1, color="#888888", linewidth=1)
    axes.axhline(statistics.median(ratios), color="#c2571a", linewidth=1, linestyle="--")
    axes.annotate(f"median {statistics.median(ratios):.0f}", (1, statistics.median(ratios)), color="#c2571a",
                  textcoords="offset points", xytext=(0, 4))
    axes.set_yscale("log")
    axes.set_xlabel("published integrals that both solve, sorted")
    axes.set_ylabel("time of SymPy alone / ours, cold caches")
    axes.grid(True, which="major", alpha=0.3)
    figure.savefig(path, dpi=130)


def report(result: dict[str, Any]) -> list[str]:
    """The figures in lines."""
    rows = result["entries"]
    ratios = [r["ratio"] for r in rows]
    over = [r["ours"] / r["construct"] for r in rows]
    worst = min(rows, key=lambda r: r["ratio"])
    r, i = result["refusal"], result["import"]
    lines = [
        f"{len(rows)} entries that both solve: stock/ours geometric mean "
        f"{math.exp(statistics.fmean(map(math.log, ratios))):.1f}, median {statistics.median(ratios):.1f}, "
        f"worst {worst['ratio']:.2f} ({worst['id']})",
        f"ours over the cost of constructing the answer: median {statistics.median(over):.1f}",
        f"refusal, {r['count']} integrals of SymPy's tests: median {1000 * r['median']:.2f} ms, "
        f"{100 * r['share']:.2f}% of stock's {r['stock']:.0f} s",
        f"import: {1000 * i['package']:.1f} ms on top of {1000 * i['sympy']:.0f} ms ({100 * i['share']:.1f}%)",
        "growth:",
    ]
    lines += [f"  {g['n']:4} {g['what']:11} {1000 * g['seconds']:9.1f} ms" for g in result["growth"]]
    lines.append("50 digits, formula against quadrature:")
    lines += [
        f"  {e['id']:22} {1000 * e['formula']:8.2f} ms {1000 * e['quadrature']:9.1f} ms  "
        f"ratio {e['quadrature'] / max(e['formula'], 1e-6):8.1f}"
        for e in result["evaluation"]
    ]
    return lines


def main(arguments: list[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m benchmarks.speed", description=__doc__)
    parser.add_argument("path", type=Path, help="a folder or file of published integrals")
    parser.add_argument("--seconds", type=float, default=10, help="limit of one call")
    parser.add_argument("--only", nargs="*", default=(), help="families or entries")
    parser.add_argument("--json", type=Path, help="write the figures here")
    parser.add_argument("--picture", type=Path, help="write the ratios as a picture here (needs matplotlib)")
    options = parser.parse_args(arguments)
    entries = [e for e in load(options.path, options.only) if e.points or not e.raw.get("symbols")]
    integrate(X * exp(-X), (X, 0, oo))  # loads the modules
    rows = [row for e in entries if (row := in_child(compare, e, options.seconds)) is not None]
    result = {
        "python": sys.version.split()[0], "sympy": sympy.__version__, "cores": os.cpu_count(), "entries": rows,
        "refusal": refusal(options.seconds), "import": import_share(), "growth": growth(),
        "evaluation": evaluation(entries),
    }
    print("\n".join(report(result)))
    if options.json:
        options.json.write_text(json.dumps(result, indent=1) + "\n")
    if options.picture:
        picture(rows, options.picture)
    return 0


if __name__ == "__main__":
    sys.exit(main())
