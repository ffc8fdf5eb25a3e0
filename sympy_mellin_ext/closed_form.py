"""The answer: a value, the region where it holds, and how it was found."""
from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any

from sympy import And, Eq, Expr, Integral, S, Symbol, latex
from sympy.logic.boolalg import Boolean

from .branches import piecewise
from .steps import Step

if TYPE_CHECKING:
    from .expansions import Asymptotics, ParameterSeries
    from .verify import Verification


@dataclass(frozen=True)
class ClosedForm:
    """A closed form with its exact region.

    Attributes
    ----------
    value : Expr
        The closed form.
    condition : Boolean
        The region of convergence in the parameters; removable singularities of ``value`` are inside.
    strip : tuple of two Expr, or None
        Fundamental strip ``lower < Re s < upper`` of the transform that was used.
    strategy : str
        Name of the strategy.
    steps : tuple of Step
    sources : tuple of str
        Published sources of the formulas used.
    special : tuple of (Boolean, Expr)
        Values where ``value`` is undefined inside the region (0*oo, oo - oo), by Laurent expansion.
    integrand, limits :
        The integral that this answers.

    Examples
    --------
    >>> from sympy import Symbol, exp, oo, symbols
    >>> from sympy_mellin_ext import closed_form
    >>> x = Symbol('x', positive=True)
    >>> s, a = symbols('s a', real=True)
    >>> answer = closed_form(x**(s - 1)*exp(-a*x), (x, 0, oo))
    >>> answer.value
    gamma(s)/a**s
    >>> answer.condition
    (a > 0) & (s > 0)
    """

    value: Expr
    condition: Boolean = S.true
    strip: tuple[Expr, Expr] | None = None
    strategy: str = ""
    steps: tuple[Step, ...] = ()
    sources: tuple[str, ...] = ()
    special: tuple[tuple[Boolean, Expr], ...] = ()
    integrand: Expr = S.Zero
    limits: tuple[tuple[Symbol, Expr, Expr], ...] = ()
    given: tuple[Any, ...] = field(default=(), repr=False)

    def as_piecewise(self, nested: bool = False) -> Expr:
        """The bare value where the assumptions imply the region, else a Piecewise that ends in the Integral.

        Values at removable singularities stand first, on an ``Eq`` branch (within the region); with
        ``nested`` they stand inside the first branch, whose condition is then the region itself, which
        is where SymPy's integral transforms read it.
        """
        if self.condition is S.true:
            return self._general()
        if nested:
            return piecewise((self._general(), self.condition), (self.integral, S.true))
        branches = [(value, And(where, self._region_at(where))) for where, value in self.special]
        return piecewise(*branches, (self.value, self.condition), (self.integral, S.true))

    def _region_at(self, where: Boolean) -> Boolean:
        if isinstance(where, Eq) and isinstance(where.lhs, Symbol):
            return self.condition.subs(where.lhs, where.rhs)
        return self.condition

    @property
    def integral(self) -> Integral:
        """The unevaluated integral that this answers."""
        return Integral(self.integrand, *self.limits)

    def verify(
        self, digits: int = 15, points: Sequence[Mapping[Symbol | str, Any]] | None = None, seconds: float = 10
    ) -> Verification:
        """Compare with numerical quadrature at points inside the region and outside; see :func:`verify`."""
        from .verify import Verification, verify

        if self.strategy.startswith("principal value"):
            return Verification((), (), (), (), None, "a principal value: quadrature finds a divergent integral")
        limits = self.limits[0] if len(self.limits) == 1 else self.limits
        return verify(self.integrand, limits, self._general(), self.condition, digits, points, self.given, seconds)

    def at(self, **values: Any) -> Expr:
        """The exact value at special parameters, also where ``value`` reads 0*oo or oo - oo.

        The strategies are asked anew with the values in the integrand; where none knows it, the value is the
        constant term of the Laurent series in a perturbation of the parameters (the same in two directions).

        Parameters
        ----------
        **values :
            Numbers or expressions by the parameters' names.

        Raises
        ------
        Refusal
            If the point lies outside the region, or no closed form is known there.
        ValueError
            If there is no parameter of this name.

        Examples
        --------
        >>> from sympy import oo, symbols
        >>> from sympy_mellin_ext import closed_form
        >>> x, a, b = symbols('x a b', positive=True)
        >>> s = symbols('s', real=True)
        >>> closed_form(x**(s - 1)/((x + a)*(x + b)), (x, 0, oo)).at(a=b, s=1)
        1/b
        """
        from .expansions import value_at

        return value_at(self, values)

    def laurent(self, parameter: Symbol, point: Any, order: int) -> ParameterSeries:
        """The Laurent series of ``value`` in a parameter; see :func:`parameter_series`.

        Examples
        --------
        >>> from sympy import oo, symbols
        >>> from sympy_mellin_ext import closed_form
        >>> x, eps = symbols('x epsilon', positive=True)
        >>> print(closed_form(x**(eps - 1)/(1 + x)**2, (x, 0, oo)).laurent(eps, 0, 1))
        1/epsilon - 1 + pi**2*epsilon/6 + O(epsilon**2)
        """
        from .expansions import parameter_series

        return parameter_series(self.value, parameter, point, order)

    def expansion(self, at: Any = 0, order: Any = 4) -> Asymptotics | None:
        """The expansion of f at 0 or oo from its transform ``int_0^oo x**(s-1) f(x) dx``; see :func:`expansion`.

        Examples
        --------
        >>> from sympy import besselj, oo, symbols
        >>> from sympy_mellin_ext import mellin
        >>> x, s = symbols('x s', positive=True)
        >>> print(mellin(besselj(0, x)**2, x, s).expansion(at=0, order=4))
        1 - x**2/2 + 3*x**4/32 + o(x**(4))
        """
        from .expansions.asymptotics import of_closed_form

        return of_closed_form(self, at, order)

    def callable(self, backend: str = "mpmath", args: Sequence[Symbol | str] | None = None) -> Callable[..., Any]:
        """The closed form as a numerical function of its parameters.

        Parameters
        ----------
        backend : 'mpmath' or 'numpy'
            The latter needs numpy and scipy (extra ``numeric``) and takes arrays.
        args : sequence of Symbol or str
            Order of the arguments; sorted by name unless given.

        Returns
        -------
        callable
            nan outside the region, finite at removable singularities.  With mpmath correct to the precision
            that is set; with numpy to about 1e-13 (real arguments), however large the Gammas that cancel.

        Raises
        ------
        ValueError
            If the library lacks a function of the closed form; the message names it.

        Examples
        --------
        >>> from sympy import exp, oo, symbols
        >>> from sympy_mellin_ext import closed_form
        >>> x, a = symbols('x a', positive=True)
        >>> s = symbols('s', real=True)
        >>> f = closed_form(x**(s - 1)*exp(-a*x), (x, 0, oo)).callable(args=(s, a))
        >>> print(f(3, 2), f(-1, 2))
        0.25 nan
        """
        from .numeric import callable_of

        return callable_of(self, backend, args)

    def source(
        self, backend: str = "mpmath", args: Sequence[Symbol | str] | None = None, name: str = "closed_form"
    ) -> str:
        """Text of a stand-alone Python module with the function of :meth:`callable`, to paste into other code.

        It needs mpmath only, or numpy and scipy only.
        """
        from .numeric import source_of

        return source_of(self, backend, args, name)

    def derivation(self, format: str = "text", standalone: bool = False) -> str:
        """How the closed form was found, step by step, each with the theorem that it uses.

        Parameters
        ----------
        format : 'text', 'markdown' or 'latex'
        standalone : bool
            With LaTeX: a whole document, not a part of one (which needs the package amsmath).

        Examples
        --------
        >>> from sympy import exp, oo, symbols
        >>> from sympy_mellin_ext import closed_form
        >>> x, s = symbols('x s', positive=True)
        >>> print(closed_form(x**(s - 1)*exp(-x), (x, 0, oo)).derivation())  # doctest: +ELLIPSIS
        Integral: Integral(x**(s - 1)*exp(-x), (x, 0, oo))
        <BLANKLINE>
        1. Kernel exp, transform in s.  [DLMF 5.9.1, 5.9.6, 5.9.7]
        ...
        """
        from .derivation import render

        return render(self, format, standalone)

    def _general(self) -> Expr:
        branches = [(value, where) for where, value in self.special]
        return piecewise(*branches, (self.value, S.true)) if branches else self.value

    def times(self, constant: Expr) -> ClosedForm:
        """The closed form of ``constant`` times the integral."""
        return replace(
            self,
            value=constant * self.value,
            special=tuple((where, constant * value) for where, value in self.special),
        )

    def __str__(self) -> str:
        region = "" if self.condition is S.true else f"  for {self.condition}"
        return f"{self.value}{region}  [{self.strategy}]"

    def _repr_latex_(self) -> str:
        region = "" if self.condition is S.true else r",\quad " + latex(self.condition)
        return rf"$\displaystyle {latex(self.integral)} = {latex(self.value)}{region}$"

    def _repr_html_(self) -> str:
        from .report.fragments import notebook

        return notebook(self)
