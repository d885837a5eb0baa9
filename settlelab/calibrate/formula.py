"""A user's own drag law given as text, such as `formula: 24/Re*(1+a*Re**b); a=0.15, b=0.7`.

Numbers, `+ - * / **`, brackets, the functions of `FUNCTIONS`, `Re`, shape descriptors by name, and any other names:
these are the parameters that the drops determine. Values to start from may follow after a semicolon; 1 where left out.
Nothing else is understood, and nothing is handed to Python to run: the text becomes a tree of which each node is known.
"""

from __future__ import annotations

import ast
from collections.abc import Callable, Mapping, Sequence
from typing import TypeVar

import numpy as np

from settlelab.calibrate.form import Descriptors, Form, Parameter, Recipe, Values
from settlelab.errors import FitError, did_you_mean
from settlelab.physics.constants import FloatArray
from settlelab.physics.drag import DESCRIPTORS

__all__ = ["FORMULA", "FUNCTIONS", "formula_form"]

FORMULA = "formula:"  # what an entry of the forms starts with
REYNOLDS = "Re"
SHAPES = (*DESCRIPTORS, "aspect_ratio")
FUNCTIONS: dict[str, tuple[int, Callable[..., FloatArray]]] = {  # name -> number of arguments, function
    "exp": (1, np.exp),
    "log": (1, np.log),
    "log10": (1, np.log10),
    "sqrt": (1, np.sqrt),
    "tanh": (1, np.tanh),
    "min": (2, np.minimum),
    "max": (2, np.maximum),
}
OPERATORS: dict[type[ast.operator], Callable[..., FloatArray]] = {
    ast.Add: np.add,
    ast.Sub: np.subtract,
    ast.Mult: np.multiply,
    ast.Div: np.divide,
    ast.Pow: np.power,
}
SIGNS: dict[type[ast.unaryop], Callable[..., FloatArray]] = {ast.UAdd: np.positive, ast.USub: np.negative}
LONGEST = 400  # characters
LARGEST = 1e100  # number
REACH = 100.0  # a parameter is sought within so many times the size of its start
LEAST_DRAG = 1e-3  # no body has a smaller drag coefficient: trial parameters that give one are led away from

Term = Callable[[Mapping[str, FloatArray]], FloatArray]
_Known = TypeVar("_Known")


def formula_form(made_by: Recipe) -> Form:
    """The form of a formula.

    Raises
    ------
    FitError
        Text that is no formula, or holds what a formula may not; the place is named.
    """
    text, _, starts = made_by.expression.partition(";")
    text = text.strip()
    tree = _parsed(text)
    term, names = _term(tree, text), _names(tree)
    shapes = tuple(name for name in names if name in SHAPES)
    free = [name for name in names if name not in (REYNOLDS, *SHAPES)]
    for name in free:
        if len(name) > 3 and (hint := did_you_mean(name, SHAPES)):
            raise _refused(text, f'"{name}" is no shape descriptor{hint}')
    if not free:
        raise _refused(text, "there is no parameter to fit, such as a in a/Re")
    begin = _starts(text, starts, free)

    def drag(values: Values, reynolds: FloatArray, descriptors: Descriptors) -> FloatArray:
        known = dict(zip(free, (np.asarray(value, dtype=np.float64) for value in values), strict=True))
        with np.errstate(all="ignore"):  # of trial parameters; what is no number is no drag coefficient
            cd = term({**known, **{name: descriptors[name] for name in shapes}, REYNOLDS: reynolds})
            return np.where(cd > LEAST_DRAG, cd, LEAST_DRAG)

    return Form(
        recipe=made_by,
        formula=f"Cd = {text}, a formula of the lab's own; ** is a power, log the natural logarithm",
        parameters=tuple(_parameter(name, begin[name]) for name in free),
        needs=shapes,
        drag=drag,
    )


def _parameter(name: str, start: float) -> Parameter:
    reach = REACH * (abs(start) or 1.0)
    return Parameter(name, start, start - reach, start + reach, "of the lab's own formula")


def _parsed(text: str) -> ast.expr:
    if len(text) > LONGEST:
        raise _refused(f"{text[:40]}...", f"it is longer than {LONGEST} characters")
    try:
        return ast.parse(text, mode="eval").body
    except (SyntaxError, ValueError) as error:
        where = f" near character {error.offset}" if isinstance(error, SyntaxError) and error.offset else ""
        raise _refused(text, f"it cannot be read{where}; expected such as 24/Re*(1 + a*Re**b)") from error


def _term(node: ast.expr, text: str) -> Term:
    """What a node stands for, as a function of the values of the names; a node that is not known is refused."""
    match node:
        case ast.Constant(value=int() | float() as number) if not isinstance(number, bool) and number < LARGEST:
            constant = np.asarray(number, dtype=np.float64)
            return lambda _: constant
        case ast.Name(id=name):
            if name in FUNCTIONS:
                raise _refused(text, f"the function {name} needs brackets")
            return lambda known: known[name]
        case ast.UnaryOp(op=sign, operand=inner):
            return _applied(_known(SIGNS, sign, node, text), [_term(inner, text)])
        case ast.BinOp(op=ast.BitXor()):
            raise _refused(text, "write ** for a power, not ^")
        case ast.BinOp(left=left, op=operator, right=right):
            return _applied(_known(OPERATORS, operator, node, text), [_term(left, text), _term(right, text)])
        case ast.Call(func=ast.Name(id=name), args=arguments, keywords=[]):
            count, function = _function(name, text)
            if len(arguments) == count:
                return _applied(function, [_term(argument, text) for argument in arguments])
            raise _refused(text, f"{name} takes {count} value{'s' * (count > 1)}")
    raise _refused(text, f"{ast.unparse(node)} is none of numbers, names, + - * / ** and {', '.join(FUNCTIONS)}")


def _applied(function: Callable[..., FloatArray], terms: Sequence[Term]) -> Term:
    return lambda known: function(*(term(known) for term in terms))


def _known(table: Mapping[type, _Known], operator: ast.AST, node: ast.expr, text: str) -> _Known:
    if type(operator) not in table:
        raise _refused(text, f"{ast.unparse(node)} holds an operator that is none of + - * / **")
    return table[type(operator)]


def _function(name: str, text: str) -> tuple[int, Callable[..., FloatArray]]:
    if name not in FUNCTIONS:
        raise _refused(text, f"{name} is no function{did_you_mean(name, FUNCTIONS)}; known: {', '.join(FUNCTIONS)}")
    return FUNCTIONS[name]


def _names(tree: ast.expr) -> list[str]:
    """The names of values, each once, in the order in which they stand in the text."""
    functions = {id(node.func) for node in ast.walk(tree) if isinstance(node, ast.Call)}
    found = [node for node in ast.walk(tree) if isinstance(node, ast.Name) and id(node) not in functions]
    return list(dict.fromkeys(node.id for node in sorted(found, key=lambda node: (node.lineno, node.col_offset))))


def _starts(text: str, starts: str, free: Sequence[str]) -> dict[str, float]:
    """Values to start from: `a=0.15, b=0.7`."""
    begin = dict.fromkeys(free, 1.0)
    for part in filter(None, (part.strip() for part in starts.split(","))):
        name, _, number = (piece.strip() for piece in part.partition("="))
        if name not in begin:
            raise _refused(text, f'"{name}" is to start from a value but is no parameter; known: {", ".join(free)}')
        try:
            begin[name] = float(number)
        except ValueError as error:
            raise _refused(text, f'"{part}" is no value to start from, such as {name}=0.15') from error
        if not np.isfinite(begin[name]):
            raise _refused(text, f'"{part}" is no finite value to start from')
    return begin


def _refused(text: str, why: str) -> FitError:
    return FitError(f'the formula "{text}" cannot be fitted: {why}')
