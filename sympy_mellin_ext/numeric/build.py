"""The text of a stand-alone Python function for a closed form, and the function itself."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from importlib.resources import files
from typing import TYPE_CHECKING, Any

from sympy import And, Eq, Symbol, Tuple, floor
from sympy.logic.boolalg import Boolean

from .hazards import moving_forms, watch
from .printer import MpmathPrinter, NumpyPrinter, identifiers

if TYPE_CHECKING:
    from ..closed_form import ClosedForm

BACKENDS = ("mpmath", "numpy")
_ACCURACY = {
    "mpmath": "correct to the precision that mpmath is set to",
    "numpy": "relative accuracy about 1e-13 for real arguments, 1e-11 next to removable singularities;\n"
    "    for complex arguments 1e-15 times the largest log Gamma",
}


def parameters_of(answer: ClosedForm, args: Sequence[Symbol | str] | None) -> list[Symbol]:
    """The arguments of the function: as given, else all parameters sorted by name."""
    bound = {x for x, _, _ in answer.limits}
    free = answer.value.free_symbols | answer.condition.free_symbols | answer.integrand.free_symbols
    free |= Tuple(*(e for _, a, b in answer.limits for e in (a, b))).free_symbols
    found = sorted(free - bound, key=str)
    if args is None:
        return found
    chosen = []
    for a in args:
        matches = [p for p in found if p == a or p.name == a]
        if len(matches) != 1:
            raise ValueError(f"args: {a} is not one of the parameters {', '.join(map(str, found))}")
        chosen.append(matches[0])
    used = answer.value.free_symbols | answer.condition.free_symbols
    missing = [str(p) for p in found if p in used and p not in chosen]
    if missing:
        raise ValueError(f"args lacks the parameters {', '.join(missing)}")
    return chosen


def source_of(
    answer: ClosedForm, backend: str = "mpmath", args: Sequence[Symbol | str] | None = None, name: str = "closed_form"
) -> str:
    """See :meth:`ClosedForm.source`."""
    return support_text(backend) + "\n\n" + function_text(answer, backend, args, name)


def function_text(
    answer: ClosedForm, backend: str, args: Sequence[Symbol | str] | None, name: str, suffix: str = ""
) -> str:
    """The function without what it needs; a suffix keeps its helpers apart from those of others in one module."""
    if backend not in BACKENDS:
        raise ValueError(f"backend must be one of {', '.join(BACKENDS)}, not {backend!r}")
    if not name.isidentifier():
        raise ValueError(f"name must be a Python identifier, not {name!r}")
    parameters = parameters_of(answer, args)
    names = identifiers(parameters)
    region, all_names = _region(answer, names)
    printer = MpmathPrinter(all_names) if backend == "mpmath" else NumpyPrinter(all_names)
    heading = ", ".join(names[p] for p in parameters)
    lines = [
        f"def _value{suffix}({heading}):",
        f"    return {printer.text(answer.value)}",
        "",
        "",
        f"def _inside{suffix}({heading}):",
        f"    return {printer.condition(region)}",
        "",
        "",
    ]
    call = f"_evaluated(_value{suffix}, _inside{suffix}, ({heading}{',' if len(parameters) == 1 else ''})"
    if isinstance(printer, NumpyPrinter):
        found = watch(answer.value, parameters)
        ways = moving_forms(found, parameters, printer)
        lines += [f"def _hazards{suffix}({heading}):", "    return ["]
        lines += [*(f"        {w}," for w in ways), "    ]", "", ""]
        call += f", _hazards{suffix}, {found.rates!r}, {found.relative!r}"
    what = " ".join(str(answer.value).split())
    lines += [
        f"def {name}({heading}):",
        f'    """{_plain(what)}',
        "",
        f"    for {_plain(str(region))}, nan elsewhere;",
        f"    {_ACCURACY[backend]}.",
        '    """',
        f"    return {call})",
    ]
    return "\n".join(lines) + "\n"


def _plain(text: str) -> str:
    return text.replace("\\", "/").replace('"', "'")


def support_text(backend: str) -> str:
    """What the generated functions of a backend need."""
    if backend not in BACKENDS:
        raise ValueError(f"backend must be one of {', '.join(BACKENDS)}, not {backend!r}")
    return files(__package__).joinpath(f"support_{backend}.py").read_text(encoding="utf-8").rstrip() + "\n"


def _region(answer: ClosedForm, names: dict[Symbol, str]) -> tuple[Boolean, dict[Symbol, str]]:
    """The condition, with what the assumptions and ``given`` say of the parameters.

    Assumptions are stated of symbols without any, named like the parameters; their names are returned too.
    """
    conditions: list[Any] = [answer.condition, *(g for g in answer.given if g.free_symbols <= set(names))]
    bare: dict[Symbol, str] = {}
    for p, name in names.items():
        b = Symbol(name)
        bare[b] = name
        if p.is_positive or p.is_negative:
            conditions.append(b > 0 if p.is_positive else b < 0)
        elif p.is_nonnegative or p.is_nonpositive:
            conditions.append(b >= 0 if p.is_nonnegative else b <= 0)
        if p.is_integer:
            conditions.append(Eq(b, floor(b), evaluate=False))
    return And(*conditions), {**bare, **names}


def callable_of(
    answer: ClosedForm, backend: str = "mpmath", args: Sequence[Symbol | str] | None = None
) -> Callable[..., Any]:
    """See :meth:`ClosedForm.callable`."""
    text = source_of(answer, backend, args)
    namespace: dict[str, Any] = {"__name__": f"{__package__}.generated"}
    exec(compile(text, f"<closed form for {backend}>", "exec"), namespace)
    function: Callable[..., Any] = namespace["closed_form"]
    return function
