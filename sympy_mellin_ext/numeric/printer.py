"""Expressions and conditions as Python text for mpmath, or for numpy and scipy."""

from __future__ import annotations

import keyword
from collections.abc import Iterable, Mapping
from typing import Any, ClassVar

from mpmath import mp
from sympy import (
    And,
    Derivative,
    Expr,
    Float,
    Function,
    I,
    Integer,
    Mul,
    Not,
    Or,
    Piecewise,
    Rational,
    S,
    Subs,
    Symbol,
    exp,
    gamma,
    hyper,
    meijerg,
    pi,
    polygamma,
    zeta,
)
from sympy.core.relational import Relational
from sympy.logic.boolalg import Boolean

_RESERVED = frozenset(("mp", "np", "sp", "Any"))


class Unsupported(ValueError):
    """A function that the numerical library lacks; the message names it."""


def identifiers(symbols: Iterable[Symbol]) -> dict[Symbol, str]:
    """Names of the symbols that Python accepts, all different."""
    names: dict[Symbol, str] = {}
    for s in symbols:
        name = "".join(c if c.isalnum() or c == "_" else "_" for c in s.name) or "_"
        if name[0].isdigit() or name.startswith("_"):
            name = "x" + name
        while keyword.iskeyword(name) or name in _RESERVED or not name.isidentifier() or name in names.values():
            name += "_" if name.isidentifier() else "x"
        names[s] = name
    return names


class Printer:
    """What both libraries have in common."""

    table: ClassVar[Mapping[str, str]] = {}
    library = ""
    conjunction, disjunction, negation = " and ", " or ", "not {}"
    real = "{}"
    true, false = "True", "False"

    def __init__(self, names: Mapping[Symbol, str]) -> None:
        self.names = dict(names)

    def text(self, e: Expr) -> str:
        """The expression as text, in brackets where it is not atomic."""
        if not e.free_symbols or isinstance(e, (Integer, Rational, Float)):
            return self.constant(e)
        if isinstance(e, Symbol):
            return self.names[e]
        if e.is_Add:
            return "(" + " + ".join(self.text(a) for a in e.args) + ")"
        if e.is_Mul:
            return self.product(e)
        if isinstance(e, exp) or e.is_Pow:
            return self.product(e)
        if isinstance(e, Piecewise):
            return self.piecewise(e)
        if isinstance(e, Function):
            return self.function(e)
        raise Unsupported(f"{self.library} has no {type(e).__name__}")

    def constant(self, e: Expr) -> str:
        raise Unsupported(self.library)

    def product(self, e: Expr) -> str:
        raise Unsupported(self.library)

    def piecewise(self, e: Piecewise) -> str:
        raise Unsupported(self.library)

    def function(self, f: Function) -> str:
        name = type(f).__name__
        special = getattr(self, "_" + name, None)
        if special is not None:
            return str(special(f))
        if name not in self.table:
            raise Unsupported(f"{self.library} has no function {name}")
        template = self.table[name]
        arguments = [self.text(a) for a in f.args]
        everything = ", ".join(arguments)
        return template.format(*arguments, all=everything) if "{" in template else f"{template}({everything})"

    def turns(self, f: Function) -> str | None:
        """Trigonometric functions of pi*v, which have exact zeros; None for other functions."""
        name = type(f).__name__
        if name not in ("sin", "cos", "tan", "cot", "sec", "csc") or not f.args[0].has(pi):
            return None
        v = (f.args[0] / pi).expand()
        if v.has(pi):
            return None
        sine, cosine = self.sine(v), self.sine(v + S.Half)
        return {
            "sin": sine, "cos": cosine, "tan": f"({sine}/{cosine})", "cot": f"({cosine}/{sine})",
            "sec": f"(1/{cosine})", "csc": f"(1/{sine})",
        }[name]  # fmt: skip

    def sine(self, v: Expr) -> str:
        """Text for sin(pi*v)."""
        raise Unsupported(self.library)

    def condition(self, c: Boolean) -> str:
        """The truth of a region at a point; inequalities compare real parts."""
        if c in (S.true, True):
            return self.true
        if c in (S.false, False):
            return self.false
        if isinstance(c, (And, Or)):
            joint = self.conjunction if isinstance(c, And) else self.disjunction
            return "(" + joint.join(self.condition(a) for a in c.args) + ")"
        if isinstance(c, Not):
            return self.negation.format(self.condition(c.args[0]))
        if isinstance(c, Relational):
            left, right = self.text(c.lhs), self.text(c.rhs)
            if c.rel_op in ("==", "!="):
                return f"({left} {c.rel_op} {right})"
            return f"({self.real.format(left)} {c.rel_op} {self.real.format(right)})"
        raise Unsupported(f"{self.library} cannot decide {c}")


_COMMON = (
    "exp log sin cos tan cot sec csc sinh cosh tanh coth sech csch asin acos atan acot asec acsc asinh acosh "
    "atanh acoth asech acsch erf erfc erfi besselj bessely besseli besselk hankel1 hankel2 gamma loggamma beta "
    "binomial factorial rf ff polylog lerchphi airyai airybi fresnels fresnelc bernoulli harmonic legendre "
    "gegenbauer laguerre jacobi hermite chebyt chebyu sign sqrt"
)


class MpmathPrinter(Printer):
    """Text for mpmath, at the precision that is set when it runs."""

    library = "mpmath"
    real = "mp.re({})"
    table: ClassVar[Mapping[str, str]] = {
        **{name: "mp." + name for name in _COMMON.split()},
        "Abs": "abs", "re": "mp.re", "im": "mp.im", "arg": "mp.arg", "conjugate": "mp.conj", "Max": "max", "Min": "min",
        "atan2": "mp.atan2", "zeta": "mp.zeta", "dirichlet_eta": "mp.altzeta", "digamma": "mp.psi(0, {0})",
        "polygamma": "mp.psi", "uppergamma": "mp.gammainc({0}, {1})", "lowergamma": "mp.gammainc({0}, 0, {1})",
        "expint": "mp.expint", "Ei": "mp.ei", "E1": "mp.e1", "Si": "mp.si", "Ci": "mp.ci", "Shi": "mp.shi",
        "Chi": "mp.chi", "li": "mp.li", "elliptic_k": "mp.ellipk", "elliptic_e": "mp.ellipe",
        "elliptic_f": "mp.ellipf", "elliptic_pi": "mp.ellippi", "LambertW": "mp.lambertw",
        "airyaiprime": "mp.airyai({0}, derivative=1)", "airybiprime": "mp.airybi({0}, derivative=1)",
        "stieltjes": "mp.stieltjes(int({0}), *[{all}][1:])", "chebyshevt": "mp.chebyt", "chebyshevu": "mp.chebyu",
        "assoc_laguerre": "mp.laguerre({0}, {1}, {2})", "harmonic": "(mp.psi(0, {0} + 1) + mp.euler)",
        "euler": "mp.eulernum(int(mp.re({0})))", "floor": "mp.floor", "ceiling": "mp.ceil",
        "Heaviside": "mp.mpf({0} > 0)", "sinc": "mp.sinc",
        "jn": "(mp.sqrt(mp.pi/(2*{1}))*mp.besselj({0} + mp.mpf(1)/2, {1}))",
        "yn": "(mp.sqrt(mp.pi/(2*{1}))*mp.bessely({0} + mp.mpf(1)/2, {1}))",
    }  # fmt: skip
    _numbers: ClassVar[Mapping[Expr, str]] = {
        S.Pi: "mp.pi", S.Exp1: "mp.e", S.EulerGamma: "mp.euler", S.Catalan: "mp.catalan", I: "mp.j",
        S.GoldenRatio: "mp.phi", S.Infinity: "mp.inf", S.NegativeInfinity: "(-mp.inf)",
    }  # fmt: skip

    def constant(self, e: Expr) -> str:
        if e in self._numbers:
            return self._numbers[e]
        if isinstance(e, Integer):
            return str(e) if e >= 0 else f"({e})"
        if isinstance(e, Rational):
            return f"(mp.mpf({e.p})/{e.q})"
        if isinstance(e, Float):
            return f"mp.mpf('{e}')"
        if e.is_Add:
            return "(" + " + ".join(self.text(a) for a in e.args) + ")"
        if e.is_Mul or e.is_Pow or isinstance(e, exp):
            return self.product(e)
        if isinstance(e, Subs):
            return self.derivative(e)
        if isinstance(e, Function):
            return self.function(e)
        raise Unsupported(f"mpmath has no {type(e).__name__}")

    def text(self, e: Expr) -> str:
        if isinstance(e, Subs):
            return self.derivative(e)
        if isinstance(e, Derivative):
            (variable, order), *more = e.variable_count
            if more:
                raise Unsupported("mpmath has no mixed Derivative")
            return f"mp.diff(lambda {self.names[variable]}: {self.text(e.expr)}, {self.names[variable]}, {order})"
        return super().text(e)

    def derivative(self, e: Subs) -> str:
        inner = e.expr
        if len(e.variables) != 1 or not isinstance(inner, Derivative) or len(inner.variable_count) != 1:
            raise Unsupported(f"mpmath has no {type(inner).__name__}")
        t = e.variables[0]
        own = MpmathPrinter({**self.names, t: "x_t"})
        return f"mp.diff(lambda x_t: {own.text(inner.expr)}, {self.text(e.point[0])}, {inner.variable_count[0][1]})"

    def product(self, e: Expr) -> str:
        above: list[str] = []
        below: list[str] = []
        for f in Mul.make_args(e):
            base, n = (f.base, f.exp) if f.is_Pow and not isinstance(f, exp) else (f, S.One)
            if isinstance(base, gamma) and n.is_Integer:
                z = self.text(base.args[0])
                above += [f"mp.{'gamma' if n > 0 else 'rgamma'}({z})"] * abs(int(n))
            elif f.is_Pow and not isinstance(f, exp) and n.could_extract_minus_sign() and n.is_Rational:
                below.append(self.power(base, -n))
            elif f.is_Pow and not isinstance(f, exp):
                above.append(self.power(base, n))
            elif isinstance(f, exp):
                above.append(f"mp.exp({self.text(f.args[0])})")
            else:
                above.append(self.text(f))
        top = "*".join(above) or "mp.one"
        return f"({top}{''.join('/' + b for b in below)})"

    def power(self, base: Expr, e: Expr) -> str:
        if base is S.Exp1:
            return f"mp.exp({self.text(e)})"
        if e is S.One:
            return self.text(base)
        if e is S.Half:
            return f"mp.sqrt({self.text(base)})"
        return f"mp.power({self.text(base)}, {self.text(e)})"

    def function(self, f: Function) -> str:
        of_pi = self.turns(f) if f.free_symbols else None
        return super().function(f) if of_pi is None else of_pi

    def sine(self, v: Expr) -> str:
        return f"mp.sinpi({self.text(v)})"

    def piecewise(self, e: Piecewise) -> str:
        text = "mp.nan"
        for value, condition in reversed(e.args):
            text = f"({self.text(value)} if {self.condition(condition)} else {text})"
        return text

    def _hyper(self, f: hyper) -> str:
        lists = ["[" + ", ".join(self.text(a) for a in p) + "]" for p in (f.ap, f.bq)]
        return f"mp.hyper({lists[0]}, {lists[1]}, {self.text(f.argument)})"

    def _meijerg(self, f: meijerg) -> str:
        lists = ["[" + ", ".join(self.text(a) for a in p) + "]" for p in (f.an, f.aother, f.bm, f.bother)]
        return f"mp.meijerg([{lists[0]}, {lists[1]}], [{lists[2]}, {lists[3]}], {self.text(f.argument)})"


class NumpyPrinter(Printer):
    """Text for numpy and scipy; products with Gammas or large exponents go through their logarithms."""

    library = "numpy with scipy.special"
    conjunction, disjunction, negation = " & ", " | ", "~{}"
    real = "np.real({})"
    true, false = "np.True_", "np.False_"
    table: ClassVar[Mapping[str, str]] = {
        **{name: "np." + name for name in ("exp", "sin", "cos", "tan", "sinh", "cosh", "tanh", "sign")},
        "log": "np.emath.log", "asin": "np.emath.arcsin", "acos": "np.emath.arccos", "atan": "np.arctan",
        "asinh": "np.arcsinh", "acosh": "np.arccosh", "atanh": "np.emath.arctanh", "cot": "(1/np.tan({0}))",
        "sec": "(1/np.cos({0}))", "csc": "(1/np.sin({0}))", "sech": "(1/np.cosh({0}))", "csch": "(1/np.sinh({0}))",
        "coth": "(1/np.tanh({0}))", "acot": "np.arctan(1/{0})", "acoth": "np.emath.arctanh(1/{0})",
        "Abs": "np.abs", "re": "np.real", "im": "np.imag", "arg": "np.angle", "conjugate": "np.conj",
        "atan2": "np.arctan2", "floor": "np.floor", "ceiling": "np.ceil", "Heaviside": "np.heaviside({0}, 0.5)",
        "erf": "sp.erf", "erfc": "sp.erfc", "erfi": "sp.erfi", "loggamma": "sp.loggamma", "digamma": "sp.psi",
        "besselj": "sp.jv", "bessely": "sp.yv", "besseli": "sp.iv", "besselk": "sp.kv", "hankel1": "sp.hankel1",
        "hankel2": "sp.hankel2", "airyai": "sp.airy({0})[0]", "airyaiprime": "sp.airy({0})[1]",
        "airybi": "sp.airy({0})[2]", "airybiprime": "sp.airy({0})[3]", "Ei": "sp.expi", "E1": "sp.exp1",
        "Si": "sp.sici({0})[0]", "Ci": "sp.sici({0})[1]", "Shi": "sp.shichi({0})[0]", "Chi": "sp.shichi({0})[1]",
        "fresnels": "sp.fresnel({0})[0]", "fresnelc": "sp.fresnel({0})[1]", "elliptic_k": "sp.ellipk",
        "elliptic_e": "sp.ellipe", "LambertW": "sp.lambertw", "dirichlet_eta": "_eta", "chebyshevt": "sp.eval_chebyt",
        "chebyshevu": "sp.eval_chebyu", "legendre": "sp.eval_legendre", "gegenbauer": "sp.eval_gegenbauer",
        "laguerre": "sp.eval_laguerre", "assoc_laguerre": "sp.eval_genlaguerre({0}, {1}, {2})",
        "hermite": "sp.eval_hermite", "jacobi": "sp.eval_jacobi", "harmonic": "(sp.psi({0} + 1) + np.euler_gamma)",
        "sinc": "np.sinc({0}/np.pi)", "jn": "sp.spherical_jn", "yn": "sp.spherical_yn",
    }  # fmt: skip

    # -- numbers -------------------------------------------------------------------------------------------------

    def constant(self, e: Expr) -> str:
        real, imaginary = self.digits(e)
        if imaginary:
            return f"complex({float(real)!r}, {float(imaginary)!r})"
        return _bracketed(repr(float(real)))

    def digits(self, e: Expr) -> tuple[Any, Any]:
        from ..verify.numeric import evaluate

        with mp.workdps(50):
            value = mp.inf if e is S.Infinity else -mp.inf if e is S.NegativeInfinity else evaluate(e, {}, 40)
            return mp.re(value), mp.im(value)

    def pair(self, e: Expr) -> str:
        """Text for a pair of doubles, correct to some 31 digits."""
        if not e.free_symbols:
            real, imaginary = self.digits(e)
            if imaginary:
                return self.constant(e)
            high = float(real)
            with mp.workdps(50):
                low = float(real - mp.mpf(high)) if mp.isfinite(real) else 0.0
            return f"_Pair({high!r}, {low!r})"
        if isinstance(e, Symbol):
            return f"_pair({self.names[e]})"
        if e.is_Add:
            return "(" + " + ".join(self.pair(a) for a in e.args) + ")"
        if e.is_Mul:
            return "(" + "*".join(self.pair(a) for a in e.args) + ")"
        if e.is_Pow and e.exp.is_Integer and abs(e.exp) <= 4:
            power = "*".join([self.pair(e.base)] * abs(int(e.exp)))
            return f"({power})" if e.exp > 0 else f"(1.0/({power}))"
        return f"_pair({self.text(e)})"

    # -- products ------------------------------------------------------------------------------------------------

    def product(self, e: Expr) -> str:
        gammas: list[str] = []
        powers: list[str] = []
        exponents: list[str] = []
        rest: list[str] = []
        for f in Mul.make_args(e):
            for argument, n in _gammas_of(f):
                gammas.append(f"({self.pair(argument)}, {n})")
            if _gammas_of(f):
                continue
            if isinstance(f, exp):
                exponents.append(self.pair(f.args[0]))
            elif f.is_Pow and f.exp.free_symbols:
                if f.base is S.Exp1:
                    exponents.append(self.pair(f.exp))
                else:
                    powers.append(f"({self.pair(f.base)}, {self.pair(f.exp)})")
            else:
                rest.append(self.factor(f))
        plain = "*".join(rest) or "1.0"
        if not (gammas or powers or exponents):
            return f"({plain})"
        lists = (f"[{', '.join(items)}]" for items in (gammas, powers, exponents))
        return f"_product({', '.join(lists)}, {plain})"

    def factor(self, f: Expr) -> str:
        if not f.free_symbols:
            return self.constant(f)
        if not f.is_Pow:
            return self.text(f)
        base, n = f.base, f.exp
        if n.is_Integer:
            text = self.text(base)
            return f"{text}**({float(n)!r})" if n > 0 else f"(1/{text}**({float(-n)!r}))"
        if base.is_nonnegative:
            return f"np.sqrt({self.text(base)})" if n is S.Half else f"np.power({self.text(base)}, {self.constant(n)})"
        return f"np.emath.power({self.text(base)}, {self.constant(n)})"

    # -- functions -----------------------------------------------------------------------------------------------

    def function(self, f: Function) -> str:
        if _gammas_of(f):
            return self.product(f)
        of_pi = self.turns(f)
        if of_pi is not None:
            return of_pi
        return super().function(f)

    def sine(self, v: Expr) -> str:
        return f"_sinpi({self.pair(v)})"

    def piecewise(self, e: Piecewise) -> str:
        text = "np.nan"
        for value, condition in reversed(e.args):
            text = f"np.where({self.condition(condition)}, {self.text(value)}, {text})"
        return text

    def _Max(self, f: Expr) -> str:
        return self._extremum("np.maximum", f)

    def _Min(self, f: Expr) -> str:
        return self._extremum("np.minimum", f)

    def _extremum(self, name: str, f: Expr) -> str:
        text, *more = [self.text(a) for a in f.args]
        for m in more:
            text = f"{name}({text}, {m})"
        return text

    def _polygamma(self, f: polygamma) -> str:
        n, z = f.args
        if n is S.Zero:
            return f"sp.psi({self.text(z)})"
        if not n.is_Integer:
            raise Unsupported(f"{self.library} has no function polygamma of order {n}")
        return f"sp.polygamma({n}, {self.text(z)})"

    def _zeta(self, f: zeta) -> str:
        w, *a = f.args
        if a and not (w.is_number and w > 1):
            raise Unsupported(f"{self.library} has no function zeta with two arguments for {w} <= 1")
        return f"sp.zeta({', '.join(self.text(v) for v in f.args)})"

    def _hyper(self, f: hyper) -> str:
        name = {(0, 1): "hyp0f1", (1, 1): "hyp1f1", (2, 1): "hyp2f1"}.get((len(f.ap), len(f.bq)))
        if name is None:
            raise Unsupported(f"{self.library} has no function hyper with {len(f.ap)} and {len(f.bq)} parameters")
        return f"sp.{name}({', '.join(self.text(v) for v in (*f.ap, *f.bq, f.argument))})"

    def _uppergamma(self, f: Expr) -> str:
        a, z = f.args
        if not a.is_positive:
            raise Unsupported(f"{self.library} has no function uppergamma of order {a}, which may be negative")
        return f"({self.text(gamma(a))}*sp.gammaincc({self.text(a)}, {self.text(z)}))"

    def _lowergamma(self, f: Expr) -> str:
        a, z = f.args
        return f"({self.text(gamma(a))}*sp.gammainc({self.text(a)}, {self.text(z)}))"

    def _expint(self, f: Expr) -> str:
        n, z = f.args
        if n.is_Integer and n >= 0:
            return f"sp.expn({n}, {self.text(z)})"
        raise Unsupported(f"{self.library} has no function expint of order {n}")


def _gammas_of(f: Expr) -> list[tuple[Expr, int]]:
    """Gamma functions and their like as (argument, power); empty for anything else."""
    base, n = (f.base, f.exp) if f.is_Pow else (f, S.One)
    if not n.is_Integer or not isinstance(base, Function) or not base.free_symbols:
        return []
    z = base.args
    name = type(base).__name__
    found: list[tuple[Expr, int]] = []
    if name == "gamma":
        found = [(z[0], 1)]
    elif name == "factorial":
        found = [(z[0] + 1, 1)]
    elif name == "beta":
        found = [(z[0], 1), (z[1], 1), (z[0] + z[1], -1)]
    elif name == "binomial":
        found = [(z[0] + 1, 1), (z[1] + 1, -1), (z[0] - z[1] + 1, -1)]
    elif name == "rf":
        found = [(z[0] + z[1], 1), (z[0], -1)]
    elif name == "ff":
        found = [(z[0] + 1, 1), (z[0] - z[1] + 1, -1)]
    return [(argument, m * int(n)) for argument, m in found]


def _bracketed(number: str) -> str:
    if number in ("inf", "-inf", "nan"):
        return f"({number.replace('inf', 'np.inf').replace('nan', 'np.nan')})"
    return f"({number})" if number.startswith("-") else number


__all__ = ["MpmathPrinter", "NumpyPrinter", "Printer", "Unsupported", "identifiers"]
