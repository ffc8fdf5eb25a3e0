"""Random integrals against quadrature: ``python -m benchmarks.fuzz --count 10000 --seed 1 --journal fuzz.jsonl``.

The grammar covers kernels, scales, powers, logarithms, sums, products of two kernels, ranges and assumptions.  Every
closed form is compared with quadrature at points inside its region, near its edges too; just outside the region the
partial integrals must not settle at the value.  A run with the same journal goes on where it stopped.
"""
from __future__ import annotations

import argparse
import json
import multiprocessing
import random
import sys
from collections import Counter
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

from sympy import (
    Ci,
    Expr,
    Heaviside,
    I,
    Integer,
    Mul,
    Rational,
    S,
    Si,
    Symbol,
    airyai,
    asinh,
    atan,
    besseli,
    besselj,
    besselk,
    bessely,
    cos,
    cosh,
    erf,
    erfc,
    exp,
    expint,
    hyper,
    log,
    lowergamma,
    oo,
    sin,
    sinh,
    sqrt,
    tanh,
    uppergamma,
)
from sympy.core.cache import clear_cache

from .scoring import OutOfTime, time_limit

X = Symbol("x", positive=True)
T = Symbol("t", real=True)


class Grammar:
    """A source of random integrals, reproducible from its seed."""

    def __init__(self, seed: int) -> None:
        self.dice = random.Random(seed)
        self.used: list[Symbol] = []

    def number(self, low: int = 1, high: int = 3) -> Expr:
        return Rational(self.dice.randint(low, 4 * high), self.dice.choice((1, 1, 2, 3, 4)))

    def positive(self) -> Expr:
        """A positive scale: a number, a symbol, or a form in symbols."""
        if self.dice.random() < 0.45:
            return self.dice.choice((S.One, S.One, Integer(2), Rational(1, 2), Integer(3)))
        symbol = Symbol(self.dice.choice("abc"), positive=True)
        if self.dice.random() < 0.15:
            return symbol**2
        return symbol

    def order(self) -> Expr:
        if self.dice.random() < 0.5:
            return self.dice.choice((S.Zero, S.One, Integer(2), Rational(1, 2), Rational(1, 3), Rational(3, 2)))
        return Symbol("nu", real=True) if self.dice.random() < 0.5 else Symbol("nu", positive=True)

    def exponent(self) -> Expr:
        if self.dice.random() < 0.4:
            return Symbol("s", real=True) - 1
        return Rational(self.dice.randint(-5, 7), self.dice.choice((1, 1, 2, 3)))

    def argument(self, x: Symbol) -> Expr:
        ratio = self.dice.choice((1, 1, 1, 1, 2, Rational(1, 2), -1, Rational(3, 2)))
        return self.positive() * x**ratio

    def kernel(self, x: Symbol) -> Expr:
        z = self.argument(x)
        choices: tuple[Callable[[], Expr], ...] = (
            lambda: exp(-z), lambda: exp(-z), lambda: exp(-z), lambda: sin(z), lambda: cos(z),
            lambda: (1 + z) ** (-self.number()), lambda: (1 + z) ** (-Symbol("d", positive=True)),
            lambda: log(1 + z), lambda: atan(z), lambda: asinh(z), lambda: erf(z), lambda: erfc(z),
            lambda: besselj(self.order(), z), lambda: besselk(self.order(), z), lambda: bessely(self.order(), z),
            lambda: exp(-2 * z) * besseli(self.order(), z), lambda: expint(1, z), lambda: Si(z), lambda: Ci(z),
            lambda: uppergamma(self.positive(), z), lambda: lowergamma(self.positive(), z), lambda: airyai(z),
            lambda: hyper((self.positive(),), (self.positive() + 1,), -z), lambda: 1 / (z**2 + z + 1),
            lambda: 1 / (exp(z) - 1), lambda: 1 / (exp(z) + 1), lambda: 1 / cosh(z), lambda: z / sinh(z),
            lambda: 1 - tanh(z), lambda: log(1 + exp(-z)), lambda: (sqrt(1 + z**2) - z) ** self.positive(),
            lambda: exp(-z) * cos(self.positive() * x), lambda: 1 / ((x + self.positive()) * (x + self.positive())),
            lambda: Heaviside(1 - x) * (1 - x) ** (self.positive() - 1), lambda: log(x**2 + self.positive()),
        )  # fmt: skip
        return self.dice.choice(choices)()

    def term(self, x: Symbol) -> Expr:
        factors = [x ** self.exponent(), self.kernel(x)]
        if self.dice.random() < 0.35:
            factors.append(self.kernel(x))
        if self.dice.random() < 0.15:
            factors.append(log(x) ** self.dice.choice((1, 1, 2)))
        return Mul(self.dice.choice((S.One, Integer(-1), Integer(2), Rational(1, 2))), *factors)

    def integral(self) -> tuple[Expr, tuple[Symbol, Expr, Expr]]:
        roll = self.dice.random()
        if roll < 0.78:
            x, low, high = X, S.Zero, oo
        elif roll < 0.88:
            x, low, high = X, S.Zero, S.One
        elif roll < 0.93:
            x, low, high = X, S.One, oo
        else:
            x, low, high = T, -oo, oo
            p = Integer(self.dice.randint(0, 3))
            body = self.dice.choice((exp(-self.positive() * x**2), 1 / cosh(x), 1 / (x**2 + self.positive()) ** 2,
                                     exp(-abs(x)), exp(self.positive() * x - exp(x))))
            return x**p * body, (x, low, high)
        f = self.term(x)
        if self.dice.random() < 0.25:
            # sums whose terms may diverge one by one: a shared power
            power = x ** self.exponent()
            f = power * (self.kernel(x) - self.dice.choice((S.One, self.kernel(x), x)))
        return f, (x, low, high)


def examine(seed: int, digits: int = 7, seconds: float = 20) -> dict[str, Any]:
    """One integral of the sequence: refused, agrees, wrong or unchecked, with what to reproduce it by."""
    from sympy_mellin_ext import closed_form

    f, limits = Grammar(seed).integral()
    record: dict[str, Any] = {"seed": seed, "integrand": str(f), "limits": str(limits)}
    clear_cache()
    try:
        with time_limit(seconds):
            answer = closed_form(f, limits)
    except OutOfTime:
        return record | {"outcome": "slow"}
    except Exception as error:  # an exception is a finding
        return record | {"outcome": "error", "note": f"{type(error).__name__}: {error}"}
    if answer is None:
        return record | {"outcome": "refused"}
    record |= {"value": str(answer.value), "condition": str(answer.condition), "strategy": answer.strategy}
    if answer.value.has(I) and answer.value.is_real is False:
        return record | {"outcome": "wrong", "note": "not real"}
    try:
        with time_limit(2 * seconds):
            certificate = answer.verify(digits=digits)
    except OutOfTime:
        return record | {"outcome": "unchecked", "note": "quadrature out of time"}
    except Exception as error:
        return record | {"outcome": "error", "note": f"verify: {type(error).__name__}: {error}"}
    outcome = {True: "agrees", False: "wrong", None: "unchecked"}[certificate.ok]
    return record | {"outcome": outcome, "note": certificate.note}


def finished(journal: Path) -> dict[int, dict[str, Any]]:
    """Records of an earlier run; a half-written last line is passed over."""
    done: dict[int, dict[str, Any]] = {}
    if journal.exists():
        for line in journal.read_text().splitlines():
            try:
                record = json.loads(line)
            except json.JSONDecodeError:
                continue
            done[record["seed"]] = record
    return done


def progress(items: Iterator[Any], total: int) -> Iterator[Any]:
    """With a bar where tqdm is installed and somebody watches."""
    try:
        from tqdm import tqdm
    except ImportError:
        return items
    return tqdm(items, total=total, disable=not sys.stderr.isatty())


def main(arguments: list[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m benchmarks.fuzz", description=__doc__)
    parser.add_argument("--count", type=int, default=300, help="number of integrals")
    parser.add_argument("--seed", type=int, default=0, help="seed of the first one; the others follow")
    parser.add_argument("--journal", type=Path, default=Path("fuzz.jsonl"), help="records, one a line")
    parser.add_argument("--jobs", type=int, default=1)
    options = parser.parse_args(arguments)
    done = finished(options.journal)
    seeds = [options.seed + n for n in range(options.count)]
    todo = [s for s in seeds if s not in done]
    with (
        options.journal.open("a") as out,
        multiprocessing.get_context("fork").Pool(options.jobs, maxtasksperchild=200) as pool,
    ):
        for record in progress(pool.imap_unordered(examine, todo), len(todo)):
            out.write(json.dumps(record) + "\n")
            out.flush()
            done[record["seed"]] = record
    records = [done[s] for s in seeds]
    counts = Counter(r["outcome"] for r in records)
    for r in sorted(records, key=lambda r: r["seed"]):
        if r["outcome"] in ("wrong", "error", "slow"):
            print(f"{r['outcome']}: seed {r['seed']}  {r['integrand']}  over {r['limits']}")
            print(f"    {r.get('value', '')}  for {r.get('condition', '')}  [{r.get('strategy', '')}] {r.get('note', '')}")
    print(f"seeds {seeds[0]} to {seeds[-1]}: " + ", ".join(f"{n} {name}" for name, n in sorted(counts.items())))
    return 1 if counts["wrong"] or counts["error"] else 0


if __name__ == "__main__":
    sys.exit(main())
