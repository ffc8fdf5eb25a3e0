"""Two kernels of one argument that the table knows as one."""
from __future__ import annotations

from dataclasses import replace

from sympy import Integer, S, pi

from ..gamma import GammaProduct
from ..gamma.tilt import Tilt, TiltedFactor
from ..kernels import pair_rows
from ..kernels.elementary import power as power_transform
from ..kernels.pairs import Pair
from .term import Kernel

_SCALES = dict.fromkeys(("besseli", "besselj", "besselk", "bessely", "cos", "sin"), 2)  # the rows keep 1/2 in the scale


def combine(kernels: tuple[Kernel, ...]) -> tuple[Kernel, ...]:
    """Merge powers of one binomial and pairs that have a row of their own."""
    if len(kernels) < 2:
        return kernels
    kernels = _merge_logarithms(_merge_powers(kernels))
    merged = list(kernels)
    again = True
    while again and len(merged) > 1:
        again = False
        for i, first in enumerate(merged):
            for j, second in enumerate(merged):
                if i == j:
                    continue
                both = _pair(first, second)
                if both is not None:
                    rest = [k for n, k in enumerate(merged) if n not in (i, j)]
                    merged, again = [*rest, both], True
                    break
            if again:
                break
    return tuple(merged)


def _merge_powers(kernels: tuple[Kernel, ...]) -> tuple[Kernel, ...]:
    """``(1+z)**(-p) * (1+z)**(-q) = (1+z)**(-p-q)``."""
    if sum(k.name == "power" for k in kernels) < 2:
        return kernels
    merged: list[Kernel] = []
    for kernel in kernels:
        for i, other in enumerate(merged):
            same = kernel.ratio == other.ratio and kernel.product.scale == other.product.scale
            if same and kernel.name == other.name == "power" and kernel.wave == other.wave:
                c = kernel.arguments[0] + other.arguments[0]
                product = power_transform(c).with_scale(kernel.product.scale)
                merged[i] = replace(other, product=product, arguments=(c,))
                break
        else:
            merged.append(kernel)
    return tuple(k for k in merged if not (k.name == "power" and k.arguments[0] is S.Zero))


def _merge_logarithms(kernels: tuple[Kernel, ...]) -> tuple[Kernel, ...]:
    """``log(1+z)**k * (1+z)**(-c)``: a k-th derivative in c."""
    logs = [k for k in kernels if k.name == "log1p"]
    if not logs:
        return kernels
    first = logs[0]
    same = [k for k in logs if k.ratio == first.ratio and k.product.scale == first.product.scale]
    partner = next(
        (
            k
            for k in kernels
            if (k.name, k.wave, k.ratio, k.product.scale) == ("power", None, first.ratio, first.product.scale)
        ),
        None,
    )
    if len(same) == 1 and partner is None:
        return kernels
    n, c = len(same), S.Zero if partner is None else partner.arguments[0]
    scale = first.product.scale
    tilt = Tilt(
        n,
        (
            TiltedFactor(S.Zero, S.One, S.Zero, 1),
            TiltedFactor(c, S.NegativeOne, S.NegativeOne, 1),
            TiltedFactor(c, S.Zero, S.NegativeOne, -1),
        ),
    )
    product = GammaProduct.of(up=[(1 if c is S.Zero else 0, 1), (c, -1)], scale=scale)
    kernel = Kernel(
        "powerlog", product, first.ratio, None, first.condition, first.inside, "DLMF 5.12.3, differentiated in b",
        (Integer(n), c), tilt,
    )  # fmt: skip
    used = [id(k) for k in same] + ([] if partner is None else [id(partner)])
    return (*(k for k in kernels if id(k) not in used), kernel)


def _pair(first: Kernel, second: Kernel) -> Kernel | None:
    for row in pair_rows().get((first.name, second.name), ()):
        kernel = _apply(row, first, second)
        if kernel is not None:
            return kernel
    return None


def _apply(row: Pair, first: Kernel, second: Kernel) -> Kernel | None:
    turned = first.name == "exp" and first.wave is not None
    if turned != row.turned or (turned and first.wave.angle != pi):  # type: ignore[union-attr]
        return None
    if first.ratio != row.square * second.ratio:
        return None
    # the rows are for these functions themselves, not for turned scales (I_nu is kept as J_nu turned)
    if any(k.wave is not None and k.name not in ("besseli", "turned 1F1") for k in (first, second)) and not turned:
        return None
    scale = second.product.scale * _SCALES.get(second.name, 1)
    other = first.product.scale * _SCALES.get(first.name, 1)
    if (other - scale**row.square).expand() is not S.Zero:
        return None
    orders = first.arguments + second.arguments
    product: GammaProduct | None = row.transform(*orders)
    if product is None:
        return None
    return Kernel(
        f"{first.name}*{second.name}", product.with_scale(scale), second.ratio, None,
        second.condition & first.condition, True, row.source, orders,
    )  # fmt: skip
