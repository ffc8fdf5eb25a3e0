"""Kernels that vanish outside (0, 1): transforms of functions cut off at x = 1.

They have ``Lam = Delta = 0``: the transform exists by the truncation alone, and the behaviour at x = 1
decides about convergence (b > 0), not a pole.
"""

from __future__ import annotations

from sympy import Expr, Rational, S, gamma, pi, sqrt

from ..gamma import GammaProduct

_H = Rational(1, 2)
of = GammaProduct.of


def unit_power(b: Expr) -> GammaProduct:
    """``(1 - z)**(b - 1)`` on (0, 1): Beta integral, DLMF 5.12.1; ``Re b > 0``."""
    return of(up=[(0, 1)], down=[(b, 1)], constant=gamma(b))


def tail_power(b: Expr) -> GammaProduct:
    """``(z - 1)**(b - 1)`` on (1, oo): DLMF 5.12.1 under z -> 1/z; ``Re b > 0``."""
    return of(up=[(1 - b, -1)], down=[(1, -1)], constant=gamma(b))


# acos(z) and acosh(1/z) on (0, 1): by parts from DLMF 5.12.1 with z**2
ACOS = of(up=[(0, 1), (_H, _H)], down=[(1, 1), (1, _H)], constant=sqrt(pi) / 2)
ASECH = of(up=[(0, 1), (0, _H)], down=[(1, 1), (_H, _H)], constant=sqrt(pi) / 2)

# -log(1 - z) on (0, 1) has the transform (psi(s + 1) + EulerGamma)/s, which is no Gamma product: the
# logarithms of 1 - z are derivatives with respect to b.
STEP = of(up=[(0, 1)], down=[(1, 1)], constant=S.One)
