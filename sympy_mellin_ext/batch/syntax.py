"""From text to a syntax tree: what is refused before anything is read as a formula."""
from __future__ import annotations

import ast
import re
import warnings

MAX_LENGTH = 10_000
MAX_DEPTH = 40
MAX_DIGITS = 60

_CHARACTERS = re.compile(r"[\w\s+\-*/().,<>=!&|~\[\]]*")
_LONG_DIGITS = re.compile(rf"[0-9_]{{{MAX_DIGITS + 1},}}")


class InputError(ValueError):
    """Text that is refused: what is wrong with it, and where.

    Attributes
    ----------
    problem : str
    text : str
    position : int or None
        Index of the character in `text`.
    """

    def __init__(self, problem: str, text: str = "", position: int | None = None) -> None:
        super().__init__(problem, text, position)
        self.problem, self.text, self.position = problem, text, position

    def __str__(self) -> str:
        if self.position is None:
            return self.problem
        return f"{self.problem} (at position {self.position + 1})"

    def pointed(self) -> str:
        """The message, with the place marked under the text where that is short enough."""
        if self.position is None or not self.text or not self.text.isprintable():
            return str(self)
        start = max(0, self.position - 40)
        shown = self.text[start:start + 78]
        return f"{self}\n    {shown}\n    {' ' * (self.position - start)}^"


def syntax_tree(text: str) -> tuple[str, int, ast.expr]:
    """The text in one line without leading spaces, how many there were, and its syntax tree.

    Raises
    ------
    InputError
    """
    if not isinstance(text, str):
        raise InputError(f"text is expected, not {type(text).__name__}")
    if len(text) > MAX_LENGTH:
        raise InputError(f"the text is too long: {len(text)} characters, at most {MAX_LENGTH} are accepted")
    if not text.strip():
        raise InputError("an expression is expected, the text is empty", text)
    match = _CHARACTERS.match(text)
    end = match.end() if match else 0
    if end < len(text):
        hint = "; powers are written **" if text[end] == "^" else ""
        raise InputError(f"character {text[end]!r} is not accepted{hint}", text, end)
    long = _LONG_DIGITS.search(text)
    if long:
        raise InputError(f"a number has more than {MAX_DIGITS} digits", text, long.start())
    _brackets(text)
    flat = re.sub(r"\s", " ", text).lstrip()
    shift = len(text) - len(flat)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("error")  # Python warns of doubtful spellings such as 1if or 1(x)
            return flat, shift, ast.parse(flat, mode="eval").body
    except SyntaxError as error:
        column = min(max((error.offset or 1) - 1, 0), len(flat)) + shift
        raise InputError("not a formula: a name, number or operator is missing or misplaced", text,
                         column) from None
    except (ValueError, MemoryError, RecursionError, OverflowError, Warning):
        raise InputError("not a formula, or nested too deeply", text) from None


def _brackets(text: str) -> None:
    """Brackets match and are not nested too deeply; Python's parser can take very long where they do not."""
    pairs, stack = {")": "(", "]": "["}, []
    for position, character in enumerate(text):
        if character in "([":
            stack.append((character, position))
            if len(stack) > MAX_DEPTH:
                raise InputError(f"brackets are nested more than {MAX_DEPTH} deep", text, position)
        elif character in pairs and (not stack or stack.pop()[0] != pairs[character]):
            raise InputError(f"{character} has no matching {pairs[character]}", text, position)
    if stack:
        raise InputError(f"{stack[-1][0]} is not closed", text, stack[-1][1])
