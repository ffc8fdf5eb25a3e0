"""The page: one HTML file with everything inside it, for light and dark, screens of any width, and paper."""
from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from html import escape
from pathlib import Path
from typing import Any

from .card import Card, Record, card
from .fragments import article

STYLE = """
:root { color-scheme: light dark; --ink: #1d2126; --dim: #5a636e; --paper: #ffffff; --panel: #f4f6f8; --rule: #d5dae0;
  --good: #1f7a4d; --bad: #b3261e; --open: #8a6100; --link: #1f5fa8; }
@media (prefers-color-scheme: dark) { :root { --ink: #e4e7ea; --dim: #a0a9b3; --paper: #15181c; --panel: #1f242a;
  --rule: #39414a; --good: #66c997; --bad: #ff8a80; --open: #e2b34c; --link: #8ab8f0; } }
* { box-sizing: border-box; }
body { margin: 0 auto; padding: 1rem clamp(0.75rem, 4vw, 2rem) 4rem; max-width: 54rem; color: var(--ink);
  background: var(--paper); font: 1rem/1.55 system-ui, sans-serif; overflow-wrap: anywhere; }
h1 { font-size: 1.6rem; margin: 0.5rem 0; line-height: 1.25; }
h2 { font-size: 1.15rem; margin: 0 0 0.4rem; line-height: 1.3; }
a { color: var(--link); }
nav ol { columns: 18rem; padding-left: 1.6rem; font-size: 0.9rem; }
article { border-top: 1px solid var(--rule); padding: 1.4rem 0 0.8rem; }
.count { color: var(--dim); font-weight: 400; margin-right: 0.3rem; }
.display { overflow-x: auto; overflow-y: hidden; padding: 0.7rem 0.8rem; margin: 0.5rem 0; background: var(--panel);
  border-radius: 0.4rem; font-size: 1.12rem; }
.display math { margin: 0; width: max-content; text-align: left; }
math { font-family: "Latin Modern Math", "STIX Two Math", "Cambria Math", math, serif; }
.line { display: flex; flex-wrap: wrap; gap: 0.1rem 0.6rem; align-items: baseline; margin: 0.15rem 0; }
.label { color: var(--dim); font-size: 0.88rem; }
.formula { overflow-x: auto; overflow-y: hidden; max-width: 100%; padding: 0.1rem 0; }
.region { margin: 0.3rem 0; }
.strategy, .sources, .note, figcaption { color: var(--dim); font-size: 0.86rem; margin: 0.3rem 0; }
.verdict { font-weight: 600; margin: 0.6rem 0 0.3rem; }
.good { color: var(--good); } .bad { color: var(--bad); } .open { color: var(--open); }
.good::before { content: "✓ "; } .bad::before { content: "✗ "; } .open::before { content: "? "; }
.scroll { overflow-x: auto; }
table { border-collapse: collapse; font-size: 0.84rem; }
th, td { text-align: left; padding: 0.22rem 0.9rem 0.22rem 0; border-bottom: 1px solid var(--rule); vertical-align: top;
  overflow-wrap: normal; }
th { color: var(--dim); font-weight: 500; }
.number { font-variant-numeric: tabular-nums; white-space: nowrap; }
.outside td { color: var(--dim); }
figure { margin: 1rem 0; } figure svg { width: 100%; max-width: 36rem; height: auto; display: block; }
details { margin: 0.5rem 0; } summary { cursor: pointer; color: var(--link); padding: 0.3rem 0; }
details ol { padding-left: 1.3rem; margin: 0.3rem 0; } details li p { margin: 0.6rem 0 0.2rem; }
.theorem { color: var(--dim); font-size: 0.86rem; display: inline-block; }
pre { overflow-x: auto; background: var(--panel); padding: 0.6rem; font-size: 0.8rem; border-radius: 0.4rem; }
.summary { color: var(--dim); }
@media screen and (max-width: 40rem) { thead { display: none; } table, tbody { display: block; }
  tr { display: grid; grid-template-columns: 1fr; padding: 0.35rem 0; border-bottom: 1px solid var(--rule); }
  td { border: 0; padding: 0.05rem 0; } td[data-label] { display: flex; gap: 0.6rem; }
  td[data-label]::before { content: attr(data-label); color: var(--dim); min-width: 6.5rem; } }
@media print { :root { --ink: #000; --dim: #444; --paper: #fff; --panel: #fff; --rule: #999; --good: #000; --bad: #000;
  --open: #000; --link: #000; } body { max-width: none; padding: 0; font-size: 10pt; } nav { display: none; }
  article { break-inside: auto; } h2, .display { break-after: avoid; } figure, tr { break-inside: avoid; }
  .display { padding: 0; overflow: visible; } .formula, .scroll { overflow: visible; } a { text-decoration: none; } }
"""


def write_report(
    records: Iterable[Record | tuple[str, Any] | Mapping[str, Any]],
    path: str | Path,
    title: str = "Closed forms",
    pictures: bool = True,
) -> Path:
    """Write one self-contained HTML page: no script, no network, formulas as MathML, pictures as SVG.

    Parameters
    ----------
    records : iterable of Record, of (name, ClosedForm), or of the records of a batch's journal
    path : str or Path
    title : str
    pictures : bool
        Whether poles, strips and sweeps are drawn (which needs matplotlib).

    Returns
    -------
    Path

    Raises
    ------
    ImportError
        If pictures are wanted and matplotlib (extra ``report``) is not installed.
    TypeError
        For a record of another kind.

    Examples
    --------
    >>> from tempfile import TemporaryDirectory
    >>> from sympy import exp, oo, symbols
    >>> from sympy_mellin_ext import closed_form
    >>> from sympy_mellin_ext.report import Record, write_report
    >>> x, s = symbols('x s', positive=True)
    >>> answer = closed_form(x**(s - 1)*exp(-x), (x, 0, oo))
    >>> with TemporaryDirectory() as folder:
    ...     page = write_report([Record('Gamma', answer)], folder + '/page.html', pictures=False)
    ...     print(page.name, '<math' in page.read_text(encoding='utf-8'))
    page.html True
    """
    cards = [card(record) for record in records]
    target = Path(path)
    target.write_text(page(cards, title, pictures), encoding="utf-8")
    return target


def page(cards: Sequence[Card], title: str, pictures: bool) -> str:
    """The text of the page."""
    articles = [article(c, i, drawn(c) if pictures else ()) for i, c in enumerate(cards, start=1)]
    contents = "".join(f'<li><a href="#i{i}">{escape(c.name)}</a></li>' for i, c in enumerate(cards, start=1))
    counts = Counter(c.certificate.verdict for c in cards if c.certificate is not None)
    told = ", ".join(f"{counts[v]} {v}" for v in ("agrees", "could not be checked", "disagrees") if counts[v])
    head = f"{len(cards)} integral{'s' * (len(cards) != 1)}" + (f"; against quadrature: {told}" if told else "")
    return (
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f'<link rel="icon" href="data:,">\n<title>{escape(title)}</title>\n<style>{STYLE}</style></head>\n<body>\n'
        f'<header><h1>{escape(title)}</h1><p class="summary">{head}</p></header>\n'
        f"<nav><ol>{contents}</ol></nav>\n<main>\n" + "\n".join(articles) + "\n</main>\n</body></html>\n"
    )


def drawn(found: Card) -> list[tuple[str, str]]:
    """The pictures that there are for a card."""
    if found.answer is None:
        return []
    from .pictures import pole_picture, sweep_picture

    made = [pole_picture(found.answer)]
    if found.sweep:
        made.append(sweep_picture(found.answer, found.sweep, found.seconds))
    return [(picture.svg, picture.caption) for picture in made if picture is not None]


__all__ = ["page", "write_report"]
