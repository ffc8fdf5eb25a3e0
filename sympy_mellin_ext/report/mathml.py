"""Formulas as presentation MathML: SymPy's printer, with the special functions in their usual letters."""
from __future__ import annotations

import re
from typing import Any

from sympy import Basic, Expr, Integer, Mul, S, fraction
from sympy.printing.mathml import MathMLPresentationPrinter

# Letters with the order as index; letters with all arguments in parentheses.
_INDEXED = {
    "besselj": "J", "bessely": "Y", "besseli": "I", "besselk": "K", "struveh": "H", "struvel": "L",
    "legendre": "P", "chebyshevt": "T", "chebyshevu": "U", "hermite": "H", "laguerre": "L",
}  # fmt: skip
_NAMED = {
    "airyai": "Ai", "airybi": "Bi", "airyaiprime": "Ai′", "airybiprime": "Bi′", "loggamma": "log Γ",
    "elliptic_k": "K", "elliptic_e": "E", "fresnels": "S", "fresnelc": "C", "lerchphi": "Φ", "digamma": "ψ",
    "asin": "arcsin", "acos": "arccos", "atan": "arctan", "acot": "arccot", "asinh": "arsinh", "acosh": "arcosh",
    "atanh": "artanh", "re": "Re", "im": "Im", "arg": "arg", "beta": "Β",
}  # fmt: skip
# Names that HTML knows and XML does not, and signs that read better.
_ENTITIES = {
    "<mo>&dd;</mo>": '<mspace width="0.17em"/><mi mathvariant="normal">d</mi>',
    "&ExponentialE;": "e", "&ImaginaryI;": "i", "&InvisibleTimes;": "&#x2062;", "&pi;": "&#960;",
    "&Infinity;": "&#8734;", "<mn>-": "<mn>&#8722;", "<mo>-</mo>": "<mo>&#8722;</mo>",
    "<mi>True</mi>": "<mtext>true</mtext>", "<mo>></mo>": "<mo>&gt;</mo>", "<mo><</mo>": "<mo>&lt;</mo>",
    "&#8476;": "Re", "&#8465;": "Im",
}  # fmt: skip

_NAME_FOLLOWS = re.compile(r"<mo>&#x2062;</mo>(?=(?:<mrow>|<msup>)*<mi>[A-Za-z]{2,}<)")


class Printer(MathMLPresentationPrinter):
    """SymPy's printer with fractions as LaTeX has them and the functions of this subject."""

    def _element(self, tag: str, *children: Any, **attributes: str) -> Any:
        node = self.dom.createElement(tag)
        for child in children:
            node.appendChild(self.dom.createTextNode(child) if isinstance(child, str) else child)
        for name, value in attributes.items():
            node.setAttribute(name, value)
        return node

    def _row(self, *children: Any) -> Any:
        return self._element("mrow", *children)

    def _call(self, head: Any, *groups: tuple[Expr, ...]) -> Any:
        """``head(a, b; c; d)`` with groups of arguments apart by semicolons."""
        row = self._row(self._l_paren())
        for i, group in enumerate(groups):
            if i:
                row.appendChild(self._element("mo", ";"))
            for j, argument in enumerate(group):
                if j:
                    row.appendChild(self._element("mo", ","))
                row.appendChild(self._print(argument))
            if not group:
                row.appendChild(self._element("mo", "–"))
        row.appendChild(self._r_paren())
        return self._row(head, self._settled(row))

    def _settled(self, row: Any) -> Any:
        """Parentheses around something low keep their size (fonts put room around those that may grow)."""
        if not any(row.getElementsByTagName(tag) for tag in ("mfrac", "msup", "msqrt", "mroot", "mtable", "msubsup")):
            for mark in (row.firstChild, row.lastChild):
                mark.setAttribute("stretchy", "false")
        return row

    def parenthesize(self, item: Any, level: int, strict: bool = False) -> Any:
        row = super().parenthesize(item, level, strict)
        marked = row.firstChild is not None and row.firstChild.nodeName == "mo" and row.firstChild.hasAttribute("form")
        return self._settled(row) if marked and row.lastChild.nodeName == "mo" else row

    def _l_paren(self) -> Any:
        return self._element("mo", "(", form="prefix", lspace="0em", rspace="0em")

    def _r_paren(self) -> Any:
        return self._element("mo", ")", form="postfix", lspace="0em", rspace="0em")

    def _print_Function(self, e: Any) -> Any:
        name = type(e).__name__
        if name in _INDEXED and len(e.args) == 2:
            index, rest = e.args
            return self._call(self._element("msub", self._element("mi", _INDEXED[name]), self._print(index)), (rest,))
        return self._call(self._element("mi", _NAMED.get(name, self.mathml_tag(e))), e.args)

    def _print_hyper(self, e: Any) -> Any:
        p, q = self._element("mn", str(len(e.ap))), self._element("mn", str(len(e.bq)))
        head = self._element(
            "mmultiscripts", self._element("mi", "F"), q, self._row(), self._element("mprescripts"), p, self._row()
        )
        return self._call(head, tuple(e.ap), tuple(e.bq), (e.argument,))

    def _print_meijerg(self, e: Any) -> Any:
        m, n, p, q = len(e.bm), len(e.an), len(e.ap), len(e.bq)
        low, high = (self._element("mrow", self._element("mn", f"{i},{j}")) for i, j in ((p, q), (m, n)))
        head = self._element("msubsup", self._element("mi", "G"), low, high)
        return self._call(head, tuple(e.ap), tuple(e.bq), (e.argument,))

    def _print_polygamma(self, e: Any) -> Any:
        order, z = e.args
        psi: Any = self._element("mi", "ψ")
        if order != 0:
            shown = self._row(self._l_paren(), self._print(order), self._r_paren())
            psi = self._element("msup", psi, shown)
        return self._call(psi, (z,))

    def _print_RisingFactorial(self, e: Any) -> Any:
        base = self._row(self._l_paren(), self._print(e.args[0]), self._r_paren())
        return self._element("msub", base, self._print(e.args[1]))

    def _print_Tuple(self, e: Any) -> Any:
        return self._call(self._row(), tuple(e))

    def _print_Piecewise(self, e: Any) -> Any:
        rows = []
        for value, condition in e.args:
            last = condition is S.true
            where = [self._element("mtext", "otherwise" if last else "for ")]
            where += [] if last else [self._print(condition)]
            rows.append(self._element("mtr", self._element("mtd", self._print(value)), self._element("mtd", *where)))
        return self._row(self._element("mo", "{"), self._element("mtable", *rows, columnalign="left"))

    def _print_Mul(self, expr: Any) -> Any:
        numerator, denominator = fraction(expr, exact=True)
        if denominator is S.One:
            return super()._print_Mul(expr) if fraction(expr)[1] is S.One else self._line(expr)
        sign = numerator.could_extract_minus_sign()
        over = self._element("mfrac", self._print(-numerator if sign else numerator), self._print(denominator))
        return self._row(self._element("mo", "-"), over) if sign else over

    def _line(self, expr: Any) -> Any:
        """A product with negative exponents, on one line."""
        row = self._row()
        if expr.could_extract_minus_sign():
            row.appendChild(self._element("mo", "-"))
            expr = -expr
        factors = expr.as_ordered_factors() if isinstance(expr, Mul) else [expr]
        for factor in factors:
            row.appendChild(self.parenthesize(factor, 51) if factor.is_Add else self._print(factor))
        return row

    def _print_Pow(self, e: Any) -> Any:
        if (e.exp.is_Rational and not e.exp.is_Integer) or e.exp == -1:
            return super()._print_Pow(e)
        base = e.base
        closed = base.is_Symbol or (base.is_Integer and base.is_nonnegative)
        body = self._print(base)
        if not closed:
            body = self._settled(self._row(self._l_paren(), body, self._r_paren()))
        return self._element("msup", body, self._print(e.exp))

    def _print_Dummy(self, e: Any) -> Any:
        return self._print_Symbol(e)


def mathml(value: Any, block: bool = False) -> str:
    """The formula as a ``math`` element, in a line of its own or in one with text.

    Examples
    --------
    >>> from sympy import Symbol
    >>> from sympy_mellin_ext.report.mathml import mathml
    >>> mathml(Symbol('x')/2)
    '<math displaystyle="true"><mfrac><mi>x</mi><mn>2</mn></mfrac></math>'
    """
    text = presentation(value)
    return f'<math display="block">{text}</math>' if block else f'<math displaystyle="true">{text}</math>'


def presentation(value: Any) -> str:
    """The inside of the ``math`` element."""
    text = Printer().doprint(value if isinstance(value, Basic) else Integer(value))
    for old, new in _ENTITIES.items():
        text = text.replace(old, new)
    # a thin space before the name of a function: a arsinh(x)
    return _NAME_FOLLOWS.sub('<mo lspace="0.17em" rspace="0em">&#x2062;</mo>', text)


__all__ = ["mathml", "presentation"]
