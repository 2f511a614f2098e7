"""Coefficients and linear combinations of independent components, as a person writes them.

A component of an allowed form is a mapping from independent keys to coefficients as text ("-2", "1/2",
"sqrt(3)/2", "0.333333333333"). Here it becomes "-2 d11" or "(c11 - c12)/2".
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from functools import reduce
from math import lcm

#: How a component is named in one notation: text ("d26") or LaTeX ("d_{26}").
Namer = Callable[[str], str]

_GREEK = {
    "alpha", "beta", "gamma", "delta", "epsilon", "varepsilon", "zeta", "eta", "theta", "kappa", "lambda",
    "mu", "nu", "xi", "pi", "rho", "sigma", "tau", "phi", "chi", "psi", "omega",
}  # fmt: skip
_GREEK_SHORT = {"eps": "varepsilon"}


def text_namer(symbol: str) -> Namer:
    """Names in plain text; a symbol that ends in a digit is kept apart by an underscore.

    >>> text_namer("d")("26"), text_namer("eps")("33"), text_namer("c2")("111")
    ('d26', 'eps33', 'c2_111')
    """
    separator = "_" if symbol[-1:].isdigit() else ""
    return lambda key: f"{symbol}{separator}{key}"


def latex_namer(symbol: str) -> Namer:
    r"""Names in LaTeX.

    >>> latex_namer("d")("26"), latex_namer("eps")("33")
    ('d_{26}', '\\varepsilon_{33}')
    """
    head = _GREEK_SHORT.get(symbol, symbol)
    if head in _GREEK:
        head = f"\\{head}"
    elif len(head) > 1:
        head = rf"\mathrm{{{head}}}"
    return lambda key: f"{head}_{{{key}}}"


def combination(terms: Mapping[str, str], name: Namer, fraction: str = "{top}/{bottom}") -> str:
    """A linear combination in the notation of ``name``; '0' for none.

    >>> combination({"11": "-2"}, text_namer("d"))
    '-2 d11'
    >>> combination({"11": "1/2", "12": "-1/2"}, text_namer("c"))
    '(c11 - c12)/2'
    >>> combination({"11": "sqrt(3)/2", "12": "1"}, text_namer("d"))
    '(sqrt(3) d11 + 2 d12)/2'
    >>> combination({"11": "1/2 + sqrt(3)/2"}, text_namer("d"))
    '(1/2 + sqrt(3)/2) d11'
    """
    if not terms:
        return "0"
    split = {key: _split(coefficient) for key, coefficient in terms.items()}
    bottom = reduce(lcm, (denominator for _, denominator in split.values()), 1)
    parts = [_term(_scaled(top, bottom // under), name(key)) for key, (top, under) in split.items()]
    joined = parts[0] + "".join(
        f" - {part[1:]}" if part.startswith("-") else f" + {part}" for part in parts[1:]
    )
    if bottom == 1:
        return joined
    if fraction != "{top}/{bottom}":
        return fraction.format(top=joined, bottom=bottom)
    return f"({joined})/{bottom}" if len(parts) > 1 else f"{joined}/{bottom}"


def latex_combination(terms: Mapping[str, str], name: Namer) -> str:
    r"""The same in LaTeX.

    >>> latex_combination({"11": "1/2", "12": "-1/2"}, latex_namer("c"))
    '\\frac{c_{11} - c_{12}}{2}'
    """
    return re.sub(r"sqrt\((\d+)\)", r"\\sqrt{\1}", combination(terms, name, r"\frac{{{top}}}{{{bottom}}}"))


def negated(coefficient: str) -> str:
    """A coefficient with the opposite sign.

    >>> negated("1/2"), negated("-sqrt(3)/2"), negated("1/2 - sqrt(3)/2")
    ('-1/2', 'sqrt(3)/2', '-1/2 + sqrt(3)/2')
    """
    first, *rest = re.split(" ([+-]) ", coefficient)
    opposite = first[1:] if first.startswith("-") else f"-{first}"
    return opposite + "".join({"+": " - ", "-": " + "}.get(part, part) for part in rest)


def _split(coefficient: str) -> tuple[str, int]:
    """Numerator as text and denominator of "a/b"; a float, or a sum in brackets, has the denominator 1."""
    if " " in coefficient:
        return f"({coefficient})", 1
    top, _, bottom = coefficient.partition("/")
    return top, int(bottom) if bottom else 1


def _scaled(top: str, factor: int) -> str:
    if factor == 1:
        return top
    sign, size = ("-", top[1:]) if top.startswith("-") else ("", top)
    if size.isdigit():
        return f"{sign}{int(size) * factor}"
    number, star, root = size.partition("*")
    if star and number.isdigit():
        return f"{sign}{int(number) * factor}*{root}"
    return f"{sign}{factor}*{size}"


def _term(coefficient: str, name: str) -> str:
    if coefficient in ("1", "-1"):
        return f"{coefficient[:-1]}{name}"
    return f"{coefficient.replace('*', ' ')} {name}"
