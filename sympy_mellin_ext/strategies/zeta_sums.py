"""Sums in which digamma, loggamma, polygamma or Hurwitz zeta functions cancel one another's leading terms.

Their expansions at 0 and oo are known term by term (`series.zeta`); together with those of the other terms they decide
where the total converges, and the finite parts add up to its value.
"""
from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from sympy import Add, Dummy, Expr, Pow, S, Symbol, harmonic, log, loggamma, polygamma, zeta

from ..closed_form import ClosedForm
from ..matching import read_terms
from ..pieces import Growth, Piece
from ..problem import Problem
from ..series.zeta import ZetaKernel, zeta_kernel
from .master_theorem import closed_form_of_pieces
from .taylor import split_front

_THEOREM = "Hardy, Ramanujan: Twelve Lectures (1940), ch. XI"


@dataclass(frozen=True)
class ZetaPiece(Piece):
    """``constant * x**power * g(scale*x**ratio)`` with g one of the functions of `series.zeta`."""

    kernel: ZetaKernel | None = None
    scale: Expr = S.One

    @property
    def plain(self) -> bool:
        return False

    def growth(self) -> Growth:
        return Growth()

    def pole_order(self, u: Expr) -> int:
        return 0

    def value(self) -> Expr:
        kernel, u = self._kernel, self.u.expand()
        transform = kernel.product.with_scale(self.scale).at(u)
        argument = kernel.argument(u).expand()
        return self.constant / self.ratio * transform * (
            zeta(argument) if kernel.offset is S.One else zeta(argument, kernel.offset)
        )

    @property
    def _kernel(self) -> ZetaKernel:
        assert self.kernel is not None
        return self.kernel

    def rungs(self, end: int) -> list[Iterator[Expr]]:
        kernel = self._kernel
        if end > 0:
            powers: list[Expr] = [S(n) for n in range(len(kernel.at_zero) + 1)]
        else:
            powers = [*dict.fromkeys(e for (e, _), _ in kernel.at_infinity), kernel.beyond]
        return [iter([(self.power + self.ratio * e).expand() for e in powers])]

    def coefficients(self, exponent: Expr, end: int) -> list[Expr]:
        kernel = self._kernel
        e = ((exponent - self.power) / self.ratio).expand()
        front = self.constant * Pow(self.scale, e)
        if end > 0:
            known = e.is_Integer and 0 <= e < len(kernel.at_zero)
            return [front * kernel.at_zero[int(e)]] if known else [Dummy("beyond")]
        terms = {logs: c for (power, logs), c in kernel.at_infinity if power == e}
        if not terms:
            return [Dummy("beyond")]
        # log(scale*x**ratio) = log(scale) + ratio*log(x)
        once = terms.get(1, S.Zero)
        return [front * (terms.get(0, S.Zero) + once * log(self.scale)), front * once * self.ratio]


class ZetaSums:
    """Sums of several functions, at least one of them built on zeta."""

    name = "sums with zeta coefficients"

    def attempt(self, problem: Problem) -> ClosedForm | None:
        if not problem.half_line or not problem.integrand.has(polygamma, loggamma, zeta, harmonic):
            return None
        x = problem.variable
        pieces: list[Piece] = []
        sources = []
        for term in Add.make_args(problem.integrand.expand(log=False, func=False, power_base=False)):
            read = self._piece(term, x, problem)
            if read is None:
                return None
            pieces.extend(read)
            sources += [p._kernel.source for p in read if isinstance(p, ZetaPiece)]
        return closed_form_of_pieces(problem, pieces, self.name, (*dict.fromkeys(sources), _THEOREM))

    def _piece(self, term: Expr, x: Symbol, problem: Problem) -> list[Piece] | None:
        constant, power, logs, f = split_front(term, x)
        found = None if logs else zeta_kernel(f, x, problem.facts.sign)
        if found is not None:
            kernel, scale, ratio = found
            return [ZetaPiece(constant, power, 0, kernel.product, ratio, kernel=kernel, scale=scale)]
        terms = read_terms(term, x, problem.facts)
        if terms is None or any(len(t.kernels) > 1 for t in terms):
            return None
        return [Piece.of_term(t) for t in terms]


STRATEGIES = (ZetaSums(),)

