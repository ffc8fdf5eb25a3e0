"""Random integrals, reproducible from a seed: kernels, powers, logarithms, sums, products, ranges, assumptions."""
from __future__ import annotations

import random
from collections.abc import Callable
from typing import Any, NamedTuple

from sympy import (
    Abs,
    Ci,
    Expr,
    Heaviside,
    I,
    Integer,
    Max,
    Min,
    Mul,
    Piecewise,
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
    pi,
    polylog,
    sin,
    sinh,
    sqrt,
    tanh,
    uppergamma,
)

X = Symbol("x", positive=True)
T = Symbol("t", real=True)
N = Symbol("n", integer=True, positive=True)

Builder = Callable[[], Expr]


class Question(NamedTuple):
    """One integral, and what is known of its parameters."""

    integrand: Expr
    limits: tuple[Symbol, Expr, Expr]
    given: tuple[Any, ...] = ()


class Grammar:
    """A source of random integrals, reproducible from its seed."""

    def __init__(self, seed: int) -> None:
        self.dice = random.Random(seed)
        self.complex_power = self.dice.random() < 0.12
        self.nu = Symbol("nu", real=True) if self.dice.random() < 0.5 else Symbol("nu", positive=True)

    # -- parameters ---------------------------------------------------------------------------------------

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
        """Orders at which formulas degenerate are frequent."""
        roll = self.dice.random()
        if roll < 0.55:
            return self.dice.choice((S.Zero, S.Zero, S.One, Integer(2), Rational(1, 2), -Rational(1, 2), Rational(1, 3),
                                     Rational(3, 2), -S.One))
        return N if roll < 0.7 else self.nu

    def exponent(self) -> Expr:
        roll = self.dice.random()
        if roll < 0.4:
            return (Symbol("s") if self.complex_power else Symbol("s", real=True)) - 1
        if roll < 0.47:
            return self.dice.choice((N, N - 1, -N, 2 * N))
        return Rational(self.dice.randint(-5, 7), self.dice.choice((1, 1, 2, 3)))

    def argument(self, x: Symbol) -> Expr:
        ratio = self.dice.choice((1, 1, 1, 1, 2, Rational(1, 2), -1, Rational(3, 2)))
        return self.positive() * x**ratio

    # -- functions ----------------------------------------------------------------------------------------

    def kernel(self, x: Symbol) -> Expr:
        z = self.argument(x)
        choices: tuple[Builder, ...] = (
            lambda: exp(-z), lambda: exp(-z), lambda: exp(-z), lambda: sin(z), lambda: cos(z),
            lambda: (1 + z) ** (-self.number()), lambda: (1 + z) ** (-Symbol("d", positive=True)),
            lambda: (1 + z) ** -N, lambda: log(1 + z), lambda: atan(z), lambda: asinh(z), lambda: erf(z),
            lambda: erfc(z), lambda: besselj(self.order(), z), lambda: besselk(self.order(), z),
            lambda: bessely(self.order(), z), lambda: exp(-2 * z) * besseli(self.order(), z), lambda: expint(1, z),
            lambda: expint(self.positive(), z), lambda: Si(z), lambda: Ci(z), lambda: uppergamma(self.positive(), z),
            lambda: lowergamma(self.positive(), z), lambda: airyai(z),
            lambda: hyper((self.positive(),), (self.positive() + 1,), -z),
            lambda: hyper((self.positive(), self.positive()), (self.positive() + 1,), -z),
            lambda: hyper((), (self.positive(),), -z), lambda: hyper((self.positive(),), (1, self.positive() + 1), -z),
            lambda: 1 / (z**2 + z + 1), lambda: 1 / (exp(z) - 1), lambda: 1 / (exp(z) + 1), lambda: 1 / cosh(z),
            lambda: z / sinh(z), lambda: 1 - tanh(z), lambda: log(1 + exp(-z)), lambda: log(1 - exp(-z)),
            lambda: (sqrt(1 + z**2) - z) ** self.positive(), lambda: exp(-z) * cos(self.positive() * x),
            lambda: 1 / ((x + self.positive()) * (x + self.positive())),
            lambda: Heaviside(1 - x) * (1 - x) ** (self.positive() - 1), lambda: log(x**2 + self.positive()),
            lambda: Heaviside(self.positive() - x), lambda: Heaviside(x - self.positive()) * exp(-x),
            lambda: Min(1, x), lambda: polylog(2, -z), lambda: sin(z) ** 2, lambda: sin(z) ** 3,
            lambda: besselj(self.order(), z) ** 2, lambda: 1 - cos(z), lambda: exp(-z) - 1,
        )  # fmt: skip
        return self.dice.choice(choices)()

    def bessel(self, x: Symbol, scale: Expr) -> Expr:
        kind = self.dice.choice((besselj, besselj, besselj, besselk, besselk, bessely))
        return kind(self.order(), scale * x)

    def term(self, x: Symbol) -> Expr:
        factors = [x ** self.exponent(), self.kernel(x)]
        if self.dice.random() < 0.35:
            factors.append(self.kernel(x))
        if self.dice.random() < 0.15:
            factors.append(log(x) ** self.dice.choice((1, 1, 2, 3)))
        return Mul(self.dice.choice((S.One, Integer(-1), Integer(2), Rational(1, 2))), *factors)

    # -- integrals ----------------------------------------------------------------------------------------

    def question(self) -> Question:
        """The integral of this seed."""
        shapes: tuple[tuple[int, Callable[[], Question]], ...] = (
            (40, self.half_line), (8, self.sum_of_products), (8, self.bessel_product), (6, self.cut_off),
            (4, self.pieces), (5, self.between), (4, self.circular), (6, self.whole_line), (3, self.complex_rate),
            (12, self.unit), (4, self.subtracted))  # fmt: skip
        return self.dice.choices([s for _, s in shapes], [w for w, _ in shapes])[0]()

    def half_line(self) -> Question:
        return Question(self.term(X), (X, S.Zero, oo))

    def sum_of_products(self) -> Question:
        return Question(self.term(X) + self.term(X), (X, S.Zero, oo))

    def bessel_product(self) -> Question:
        """Two Bessel functions with scales of known order, and often a third factor."""
        a, b = Symbol("a", positive=True), Symbol("b", positive=True)
        scales = self.dice.choice(((a, b), (a, a), (a, S.One), (Integer(2), S.One), (S.One, S.One)))
        f = X ** self.exponent() * self.bessel(X, scales[0]) * self.bessel(X, scales[1])
        if self.dice.random() < 0.25:
            f *= self.dice.choice((exp(-self.positive() * X), exp(-self.positive() * X**2), 1 / (1 + X**2)))
        return Question(f, (X, S.Zero, oo), (a > b,) if scales == (a, b) and self.dice.random() < 0.7 else ())

    def subtracted(self) -> Question:
        """Sums whose terms may diverge one by one: a shared power."""
        power = X ** self.exponent()
        return Question(power * (self.kernel(X) - self.dice.choice((S.One, self.kernel(X), X))), (X, S.Zero, oo))

    def unit(self) -> Question:
        ends = self.dice.choice(((S.Zero, S.One), (S.Zero, S.One), (S.One, oo)))
        f = self.term(X)
        if self.dice.random() < 0.4:
            root = self.dice.choice((1 - X, 1 - X**2, 1 + X))
            f = X ** self.exponent() * root ** (self.number() - 1) * log(X) ** self.dice.choice((0, 1, 2))
        return Question(f, (X, *ends))

    def cut_off(self) -> Question:
        """A parameter as an end."""
        a = Symbol("a", positive=True)
        if self.dice.random() < 0.5:
            root = self.dice.choice((S.One, (a - X) ** (self.number() - 1), 1 / sqrt(a**2 - X**2), self.kernel(X)))
            return Question(X ** self.exponent() * root, (X, S.Zero, a))
        root = self.dice.choice((
            exp(-X), 1 / sqrt(X**2 - a**2), (X - a) ** (self.number() - 1) * exp(-X), self.kernel(X)))  # fmt: skip
        return Question(X ** self.exponent() * root, (X, a, oo))

    def pieces(self) -> Question:
        x, a = X, self.positive()
        power = x ** self.exponent()
        f = self.dice.choice((
            Piecewise((x, x < a), (exp(-x), True)), Piecewise((self.kernel(x), x < 1), (0, True)),
            Piecewise((0, x < a), (self.kernel(x) / x**2, True)), Max(x, a) * exp(-x), Abs(x - a) * exp(-x),
            Min(a, x) / x**2, Heaviside(x - 1) * Heaviside(3 - x) * self.kernel(x)))  # fmt: skip
        return Question(power * f, (x, S.Zero, oo))

    def between(self) -> Question:
        a, b = Symbol("a", positive=True), Symbol("b", positive=True)
        p, q = self.number() - 1, self.number() - 1
        f = (X - a) ** p * (b - X) ** q * self.dice.choice((S.One, S.One, 1 / X, X, X ** (-p - q - 2)))
        return Question(f, (X, a, b), (a < b,))

    def circular(self) -> Question:
        p, q = self.exponent(), self.dice.choice((S.Zero, S.One, self.exponent()))
        base = sin(X) ** p * cos(X) ** q
        if self.dice.random() < 0.3:
            base *= log(sin(X))
        return Question(base, (X, S.Zero, pi / 2))

    def whole_line(self) -> Question:
        a, p = self.positive(), Integer(self.dice.randint(0, 3))
        body = self.dice.choice((
            exp(-a * T**2), exp(-a * T**2 + self.positive() * T), 1 / cosh(a * T), 1 / (T**2 + a) ** 2,
            exp(-abs(a * T)), exp(a * T - exp(T)), cos(self.positive() * T) / (T**2 + a**2),
            exp(a * T) / (1 + exp(T)) ** 4, exp(-(T - a) ** 2) * cos(T)))  # fmt: skip
        return Question(T**p * body, (T, -oo, oo))

    def complex_rate(self) -> Question:
        size = self.positive()
        rate = size + self.dice.choice((1, -1, 2)) * I * self.dice.choice((S.One, Symbol("b", positive=True)))
        f = self.dice.choice((exp(-rate * X), exp(I * self.positive() * X), exp(-rate * X**2)))
        if self.dice.random() < 0.4:
            f *= self.kernel(X)
        return Question(X ** self.exponent() * f, (X, S.Zero, oo))
