"""``python -m sympy_mellin_ext.examples``: integrand, closed form, region, numerical check and time of each."""
from __future__ import annotations

import sys
from time import perf_counter

from sympy import S
from sympy.core.cache import clear_cache

from .. import closed_form
from . import BUOYS


def main() -> int:
    """Print the list; the exit status is the number of integrals without a checked closed form."""
    failures = 0
    for number, example in enumerate(BUOYS, start=1):
        clear_cache()
        start = perf_counter()
        answer = closed_form(example.integrand, example.limits)
        seconds = perf_counter() - start
        variable, lower, upper = example.limits
        print(f"{number:2}. {example.question}")
        print(f"    integrand    {example.integrand}")
        print(f"    range        {variable} from {lower} to {upper}")
        if answer is None:
            failures += 1
            print("    closed form  none found")
            continue
        certificate = answer.verify(digits=12)
        failures += certificate.ok is not True
        verdict = {True: "agrees", False: "DISAGREES", None: "could not be checked"}[certificate.ok]
        digits = f" to {min(certificate.digits):.0f} digits" if certificate.digits else ""
        print(f"    closed form  {answer.value}")
        for where, value in answer.special:
            print(f"                 {value}  where {where}")
        print(f"    region       {'everywhere under the assumptions' if answer.condition is S.true else answer.condition}")
        print(f"    quadrature   {verdict}{digits} at {len(certificate.points)} points {certificate.note}".rstrip())
        print(f"    time         {1000 * seconds:.1f} ms (cold caches), {answer.strategy}")
    print(f"{len(BUOYS) - failures} of {len(BUOYS)} integrals solved and checked")
    return failures


if __name__ == "__main__":
    sys.exit(main())
