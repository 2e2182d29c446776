"""The faults: one change of one operator, number or name in a module's syntax tree."""

from __future__ import annotations

import ast
from collections.abc import Iterator
from copy import deepcopy
from dataclasses import dataclass
from typing import Final

_COMPARED: Final[dict[type[ast.cmpop], tuple[type[ast.cmpop], ...]]] = {
    ast.Lt: (ast.LtE, ast.Gt),
    ast.LtE: (ast.Lt, ast.GtE),
    ast.Gt: (ast.GtE, ast.Lt),
    ast.GtE: (ast.Gt, ast.LtE),
    ast.Eq: (ast.NotEq,),
    ast.NotEq: (ast.Eq,),
    ast.Is: (ast.IsNot,),
    ast.IsNot: (ast.Is,),
}
_COMPUTED: Final[dict[type[ast.operator], type[ast.operator]]] = {
    ast.Add: ast.Sub,
    ast.Sub: ast.Add,
    ast.Mult: ast.Div,
    ast.Div: ast.Mult,
    ast.BitAnd: ast.BitOr,
    ast.BitOr: ast.BitAnd,
}
_NAMES: Final = {
    "minimum": "maximum", "maximum": "minimum", "min": "max", "max": "min", "fmin": "fmax",
    "fmax": "fmin", "logical_and": "logical_or", "logical_or": "logical_and", "ceil": "floor",
    "floor": "ceil", "any": "all", "all": "any", "low": "high", "high": "low",
    "rounded_up": "rounded_down", "rounded_down": "rounded_up", "at_most": "at_least",
    "at_least": "at_most",
}  # fmt: skip


@dataclass(frozen=True, slots=True)
class Mutant:
    """A module with one fault: where, what stood there, what stands there now."""

    module: str
    line: int
    column: int
    function: str
    before: str
    after: str
    source: str

    def __str__(self) -> str:
        """Return it on one line."""
        place = f"{self.module}:{self.line}:{self.column} {self.function}"
        return f"{place}: {self.before}  =>  {self.after}"


def _kept(tree: ast.AST) -> set[int]:
    """Return nodes that are no arithmetic: docstrings, annotations, decorators, messages."""
    found: set[int] = set()

    def keep(node: ast.AST | None) -> None:
        if node is not None:
            found.update(id(inner) for inner in ast.walk(node))

    for node in ast.walk(tree):
        match node:
            case ast.FunctionDef() | ast.ClassDef():
                for decorator in node.decorator_list:
                    keep(decorator)
                if isinstance(node, ast.FunctionDef):
                    keep(node.returns)
            case ast.arg() | ast.AnnAssign():
                keep(node.annotation)
            case ast.JoinedStr() | ast.Raise():
                keep(node)
            case ast.Assign() if "|" in ast.unparse(node.value):
                # A union of types, unless it is arithmetic on flags.
                if not any(isinstance(n, ast.Call | ast.Compare) for n in ast.walk(node.value)):
                    keep(node)
            case _:
                pass
    return found


def _changed(node: ast.AST) -> Iterator[ast.AST]:
    """Yield the faults that one node may have."""
    match node:
        case ast.Compare(ops=[op]):
            for other in _COMPARED.get(type(op), ()):
                yield ast.Compare(node.left, [other()], node.comparators)
        case ast.BinOp() if type(node.op) in _COMPUTED:
            yield ast.BinOp(node.left, _COMPUTED[type(node.op)](), node.right)
        case ast.BoolOp():
            other_bool = ast.Or() if isinstance(node.op, ast.And) else ast.And()
            yield ast.BoolOp(other_bool, node.values)
        case ast.UnaryOp(op=ast.USub() | ast.Not() | ast.Invert()):
            yield node.operand
        case ast.Constant(value=float(value)) if value != 0.0:
            yield ast.Constant(value * 1.02)
        case ast.Constant(value=int(value)) if not isinstance(value, bool):
            yield ast.Constant(value + 1)
        case ast.Constant(value=float()):
            yield ast.Constant(1.0)
        case ast.Attribute() if node.attr in _NAMES:
            yield ast.Attribute(node.value, _NAMES[node.attr], node.ctx)
        case ast.Name(ctx=ast.Load()) if node.id in _NAMES:
            yield ast.Name(_NAMES[node.id], node.ctx)
        case ast.IfExp():
            yield ast.IfExp(node.test, node.orelse, node.body)
        case _:
            pass


class _Put(ast.NodeTransformer):
    """Puts one node in the place of another."""

    def __init__(self, place: int, new: ast.AST) -> None:
        self.place, self.new, self.count = place, new, -1

    def visit(self, node: ast.AST) -> ast.AST:
        """Count nodes in the order of the tree, and exchange the one that is meant."""
        self.count += 1
        if self.count == self.place:
            return ast.copy_location(self.new, node)
        return self.generic_visit(node)


def _in_order(tree: ast.AST) -> Iterator[tuple[ast.AST, str]]:
    """Yield every node in the order in which a transformer visits, with the function around it."""

    def walk(node: ast.AST, name: str) -> Iterator[tuple[ast.AST, str]]:
        if isinstance(node, ast.FunctionDef | ast.ClassDef):
            name = f"{name}.{node.name}" if name else node.name
        yield node, name
        for child in ast.iter_child_nodes(node):
            yield from walk(child, name)

    return walk(tree, "")


def mutants(module: str, source: str) -> Iterator[Mutant]:
    """Yield every fault that a module may have.

    Parameters
    ----------
    module : str
        Its dotted name [-]
    source : str
        Its text [-]

    Yields
    ------
    Mutant
        One fault each [-]
    """
    tree = ast.parse(source)
    kept = _kept(tree)
    for place, (node, function) in enumerate(_in_order(tree)):
        if id(node) in kept:
            continue
        for new in _changed(node):
            before, after = ast.unparse(node), ast.unparse(new)
            faulty = _Put(place, new).visit(deepcopy(tree))
            text = ast.unparse(ast.fix_missing_locations(faulty))
            line, column = getattr(node, "lineno", 0), getattr(node, "col_offset", 0) + 1
            yield Mutant(module, line, column, function, before, after, text)
