"""What the matcher produces: terms made of a constant, a power, logarithms and kernels."""
from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

from sympy import Expr, Integer, S
from sympy.logic.boolalg import Boolean

from ..gamma import GammaProduct
from ..gamma.tilt import Tilt


class Wave(NamedTuple):
    """The rotation of a kernel's scale by ``angle`` (radians), as a factor of the transform in ``u``.

    ``real``: the mean of both conjugate rotations, ``cos(angle*u + phase)``.
    Otherwise: one rotation, ``exp(-I*(angle*u + phase))``.
    ``parts``: real and imaginary part of the scale, where they are simpler than modulus and angle; only
    with phase 0 or -pi/2.
    """

    angle: Expr
    phase: Expr
    real: bool
    parts: tuple[Expr, Expr] | None = None


@dataclass(frozen=True)
class Kernel:
    """A kernel ``g(eta*x**ratio)`` with the Mellin transform of ``g(eta*z)`` in ``z``.

    Attributes
    ----------
    name : str
        Name of the row of the table.
    product : GammaProduct
        Transform of ``z -> g(eta*z)``; the modulus of ``eta`` is its scale.
    ratio : Expr
        Real and non-zero.
    wave : Wave or None
        Rotation of the scale, if any.
    condition : Boolean
        What the parameters must satisfy for the transform to hold (positivity of the real part of the
        scale where it is not known, for example).
    inside : bool
        True if ``condition`` already guarantees that the scale lies strictly inside the sector of
        absolute convergence.
    source : str
        Where the transform is published.
    arguments : tuple of Expr
        Parameters of the function (orders), for strategies that combine kernels.
    tilt : Tilt or None
        Derivative in a parameter, whose value replaces that of ``product``; the product then only says
        where the poles are (each of the right side counts ``tilt.order`` times more).
    """

    name: str
    product: GammaProduct
    ratio: Expr = S.One
    wave: Wave | None = None
    condition: Boolean = S.true
    inside: bool = False
    source: str = ""
    arguments: tuple[Expr, ...] = ()
    tilt: Tilt | None = None


@dataclass(frozen=True)
class Term:
    """``coefficient * x**power * log(x)**logs * prod(kernels)``."""

    coefficient: Expr = S.One
    power: Expr = S.Zero
    logs: int = 0
    kernels: tuple[Kernel, ...] = ()

    def times(self, other: Term) -> Term:
        return Term(
            self.coefficient * other.coefficient,
            self.power + other.power,
            self.logs + other.logs,
            self.kernels + other.kernels,
        )

    def scaled(self, constant: Expr | Integer) -> Term:
        return Term(self.coefficient * constant, self.power, self.logs, self.kernels)
