"""Reading an integrand on (0, 1), where ``1 - x**r`` is positive and counts as a factor of its own."""

from __future__ import annotations

from collections.abc import Callable

from sympy import (
    Add,
    Expr,
    Pow,
    S,
    acos,
    acosh,
    asin,
    atanh,
    cosh,
    elliptic_e,
    elliptic_k,
    exp,
    hyper,
    log,
    pi,
    sinh,
)
from sympy.logic.boolalg import And, Boolean

from ...gamma import GammaProduct
from ...kernels.elementary import LOG1P
from ...kernels.elementary import power as power_transform
from ...kernels.truncated import ACOS, STEP, unit_power
from ...matching.monomials import monomials
from ...matching.reader import Reader
from ...matching.term import Kernel
from ...matching.waves import Draft

_BETA = "DLMF 5.12.1"
Drafts = list[Draft]


class UnitReader(Reader):
    """A reader for 0 < x < 1.

    It adds the kernels 'unit power' (``(1 - x**ratio)**e``, argument e), 'unit log' (``log(1 - x**ratio)``) and
    'unit acos', and lets kernels have a negative scale where no singular point comes to lie inside (0, 1).
    """

    def read(self, expr: Expr) -> Drafts | None:
        rule = _UNIT_RULES.get(type(expr))
        if rule is not None and expr.has_free(self.x):
            inner = expr.args[0]
            if inner.has_free(self.x):
                return self.read(rule(inner))
        if type(expr) is acos:
            return self._acos(expr.args[0])
        return super().read(expr)

    def _unit_power(self, ratio: Expr, e: Expr) -> Drafts:
        kernel = Kernel("unit power", unit_power(e + 1), ratio, None, S.true, True, _BETA, (e,))
        return [Draft(kernels=(kernel,))]

    def _acos(self, inner: Expr) -> Drafts | None:
        parts = monomials(inner, self.x)
        if parts is None or len(parts) != 1 or parts[0][0] is not S.One or self.facts.sign(parts[0][1]) != 1:
            return None
        return [Draft(kernels=(Kernel("unit acos", ACOS, parts[0][1], None, S.true, True, _BETA),))]

    # -- binomials ---------------------------------------------------------------------------------

    def _binomial_power(self, parts: list[tuple[Expr, Expr]], exponent: Expr) -> Drafts | None:
        (c0, p0), (c1, p1) = parts
        gap = self.facts.sign(p1 - p0)
        if gap in (None, 0):
            return None
        if gap == -1:
            (c0, p0), (c1, p1) = (c1, p1), (c0, p0)
        ratio = (p1 - p0).expand()
        if not exponent.is_integer and self.facts.sign(c0) != 1:
            return super()._binomial_power(parts, exponent)
        front = Draft(coefficient=Pow(c0, exponent), power=p0 * exponent)
        if _opposite(c0, c1):
            return [front.times(d) for d in self._unit_power(ratio, exponent)]
        sign0, sign1 = self.facts.sign(c0), self.facts.sign(c1)
        if sign0 is None or sign1 is None or sign0 * sign1 != -1:
            return super()._binomial_power(parts, exponent)
        kernel = self._kernel(
            "power", power_transform(-exponent), c1 / c0, ratio, "DLMF 5.12.3", (-exponent,)
        )
        return None if kernel is None else [front.times(Draft(kernels=(kernel,)))]

    def _log_sum(self, inner: Add) -> Drafts | None:
        parts = monomials(inner, self.x)
        if parts is not None and len(parts) == 2:
            (c0, p0), (c1, p1) = parts
            gap = self.facts.sign(p1 - p0)
            if gap == -1:
                (c0, p0), (c1, p1) = (c1, p1), (c0, p0)
            if gap in (1, -1) and self.facts.sign(c0) == 1:
                ratio = (p1 - p0).expand()
                drafts: Drafts = []
                if _opposite(c0, c1):
                    drafts.append(Draft(kernels=(_unit_log(ratio),)))
                else:
                    kernel = self._kernel(
                        "log1p", LOG1P, c1 / c0, ratio, "from memory: Gradshteyn-Ryzhik 4.293.3"
                    )
                    if kernel is None:
                        return None
                    drafts.append(Draft(kernels=(kernel,)))
                if c0 is not S.One:
                    drafts.append(Draft(coefficient=log(c0)))
                if not p0.is_zero:
                    drafts.append(Draft(coefficient=p0, logs=1))
                return drafts
        return super()._log_sum(inner)

    # -- scales ------------------------------------------------------------------------------------

    def _kernel(
        self,
        name: str,
        product: GammaProduct,
        scale: Expr,
        ratio: Expr,
        source: str,
        arguments: tuple[Expr, ...] = (),
        condition: Boolean = S.true,
    ) -> Kernel | None:
        """As on the half line for positive scales; others where the series at 0 reaches to x = 1."""
        known = self.facts.sign(scale) if scale.is_extended_real else None
        if known == 1:
            return super()._kernel(name, product, scale, ratio, source, arguments, condition)
        if known == 0 or self.facts.sign(ratio) != 1:
            return None
        if product.delta < 0:
            return None
        if product.delta == 0:
            # singular where x**ratio = 1/abs(scale): may lie at x = 1, not inside
            if not scale.is_extended_real:
                return None
            room = self.facts.sign(1 + scale)
            if room == -1 or (known is None and room != 1):
                return None
            if room is None:
                condition = And(condition, scale > -1)
        return Kernel(name, product.with_scale(scale), ratio, None, condition, True, source, arguments)

    def _nonnegative(self, expr: Expr) -> bool:
        if type(expr) is Add and len(expr.args) == 2:
            parts = monomials(expr, self.x)
            if parts is not None and len(parts) == 2:
                (c0, p0), (c1, p1) = parts if self.facts.sign(parts[1][1] - parts[0][1]) == 1 else parts[::-1]
                gap = self.facts.sign(p1 - p0)
                if gap == 1 and self.facts.sign(c0) == 1 and self.facts.sign((c0 + c1).expand()) in (0, 1):
                    return True
        if type(expr) is log and expr.args[0].is_Add:
            return False
        return super()._nonnegative(expr)


def _opposite(c0: Expr, c1: Expr) -> bool:
    return (c0 + c1).expand() is S.Zero


def _unit_log(ratio: Expr) -> Kernel:
    return Kernel("unit log", STEP, ratio, None, S.true, True, _BETA)


_UNIT_RULES: dict[type, Callable[[Expr], Expr]] = {
    # DLMF 4.37.26-type, 15.4.4, 19.5.1, 19.5.2
    asin: lambda z: pi / 2 - acos(z),
    atanh: lambda z: (log(1 + z) - log(1 - z)) / 2,
    cosh: lambda z: (exp(z) + exp(-z)) / 2,
    sinh: lambda z: (exp(z) - exp(-z)) / 2,
    acosh: lambda z: log(z + (z**2 - 1) ** S.Half),
    elliptic_k: lambda m: pi / 2 * hyper([S.Half, S.Half], [1], m),
    elliptic_e: lambda m: pi / 2 * hyper([-S.Half, S.Half], [1], m),
}
