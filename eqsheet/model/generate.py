"""Python code generated from tapes: plain floats, arrays of cases, and whole blocks.

The code is put together from the operations of a tape and the numbers of its operands only; no text of a
worksheet ever gets into it. An instruction used once is written where it is used, any other becomes a local
variable. In code for plain floats a branch of an ``if`` is evaluated only where it is taken.

Code for plain floats raises ValueError, ZeroDivisionError or OverflowError outside the domain of an operation
(a negative number to a fractional power included; nothing ever becomes complex); `safe_function` gives nan
and infinities instead. Code for arrays gives nan and infinities.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache
from itertools import accumulate
from typing import Any

from eqsheet.model.evaluate import evaluate
from eqsheet.model.functions import ALL_BINARY_FUNCTIONS, ALL_UNARY_FUNCTIONS, BINARY, UNARY, as_float
from eqsheet.model.interpolant import Interpolant
from eqsheet.model.simplify import uses
from eqsheet.model.tape import Tape, operands_of

Function = Callable[..., Any]

MEMORY = 1 << 14
# Deepest expression written in one piece; the compiler's own stack allows about 200 brackets.
_DEEPEST = 24
# Compiling takes as long as interpreting about fifteen times (measured: 60 against 4 microseconds).
_CALLS_WORTH_COMPILING = 12

DOMAIN_ERRORS = (ValueError, ZeroDivisionError, OverflowError)


@lru_cache(maxsize=MEMORY)
def float_function(tape: Tape) -> Function:
    """The tape as a function of plain floats.

    Returns
    -------
    callable
        ``f(q0, q1, ..., l0, l1, ...)``: all quantities, then all literals of the tape. It returns a tuple of
        the outputs, or the output itself where there is only one. It raises one of `DOMAIN_ERRORS` where an
        instruction needed has no value, and where one has none that two branches share though neither is
        taken; `safe_function` tells these apart.
    """
    code = _Code(tape, _SCALAR)
    return _compiled(_head(tape), code.lines(_packed), code.names(_scalar_names()))


@lru_cache(maxsize=MEMORY)
def safe_function(tape: Tape) -> Function:
    """`float_function` that gives nan and infinities (those of `evaluate`) instead of raising."""
    fast = float_function(tape)
    count = tape.quantities

    def safe(*values: float) -> Any:
        try:
            return fast(*values)
        except DOMAIN_ERRORS:
            return _outputs(tape, evaluate(tape, values[:count], values[count:]))

    return safe


@lru_cache(maxsize=MEMORY)
def value_function(tape: Tape) -> Function:
    """`safe_function` that compiles only once it has been called often enough to pay for it.

    Until then it interprets; both give the same floats.
    """
    count = tape.quantities
    calls = 0
    compiled: Function | None = None

    def value(*values: float) -> Any:
        nonlocal calls, compiled
        if compiled is not None:
            return compiled(*values)
        calls += 1
        if calls >= _CALLS_WORTH_COMPILING:
            compiled = safe_function(tape)
        return _outputs(tape, evaluate(tape, values[:count], values[count:]))

    return value


def _outputs(tape: Tape, steps: list[Any]) -> Any:
    if len(tape.outputs) == 1:
        return steps[tape.outputs[0]]
    return tuple([steps[i] for i in tape.outputs])


@lru_cache(maxsize=MEMORY)
def array_function(tape: Tape) -> Function:
    """The tape as a function of arrays.

    Returns
    -------
    callable
        Same signature as `float_function`; each argument a float or an array, broadcast against each other.
        An output that depends on no argument is a float. nan and infinities where there is no value; never
        raises.
    """
    code = _Code(tape, _ARRAY)
    lines = ["with errstate(all='ignore'):", *(" " + line for line in code.lines(_packed))]
    return _compiled(_head(tape), lines, code.names(_array_names()))


def grouped_function(tape: Tape, unknowns: int, groups: Sequence[int], extra: int = 0) -> Function:
    """The tape as a function of sequences, with its outputs in groups.

    Parameters
    ----------
    tape : Tape
    unknowns : int
        The first so many quantities are the first argument.
    groups : sequence of int
        How many of the outputs each tuple of the result holds, in order; a single one is the result itself.
    extra : int
        The last so many quantities are a third argument; 0 for none.

    Returns
    -------
    callable
        ``f(x, p)`` or ``f(x, p, e)``: x the unknowns, p all other quantities and then the literals. It raises one
        of `DOMAIN_ERRORS`, as `float_function`.
    """
    known = tape.quantities - extra
    arguments = {
        "x": [f"q{k}" for k in range(unknowns)],
        "p": [f"q{k}" for k in range(unknowns, known)] + [f"l{k}" for k in range(tape.literals)],
        "e": [f"q{k}" for k in range(known, tape.quantities)],
    }
    ends = list(accumulate(groups))

    def grouped(texts: list[str]) -> str:
        return ",".join([_tuple(texts[end - size : end]) for end, size in zip(ends, groups)])

    lines = [f"{_tuple(names)}={argument}" for argument, names in arguments.items() if names]
    code = _Code(tape, _SCALAR)
    head = "x,p,e" if extra else "x,p"
    return _compiled(head, lines + code.lines(grouped), code.names(_scalar_names()))


# --- writing ----------------------------------------------------------------------------------------------


def _head(tape: Tape) -> str:
    return ",".join([f"q{k}" for k in range(tape.quantities)] + [f"l{k}" for k in range(tape.literals)])


def _tuple(texts: list[str]) -> str:
    return f"({','.join(texts)},)" if texts else "()"


def _packed(texts: list[str]) -> str:
    return texts[0] if len(texts) == 1 else _tuple(texts)


def _compiled(head: str, lines: list[str], names: dict[str, Any]) -> Function:
    body = "\n ".join(lines)
    scope: dict[str, Function] = {}
    exec(compile(f"def f({head}):\n {body}\n", "<tape>", "exec"), names, scope)
    return scope["f"]


@lru_cache(maxsize=1)
def _scalar_names() -> dict[str, Any]:
    names: dict[str, Any] = {name: UNARY[name].value for name in ALL_UNARY_FUNCTIONS}
    names.update({name: BINARY[name] for name in ALL_BINARY_FUNCTIONS})
    names.update({"pow": math.pow, "inf": math.inf, "nan": math.nan, "__builtins__": {}})
    return names


@lru_cache(maxsize=1)
def _array_names() -> dict[str, Any]:
    from eqsheet.model.array_functions import ARRAY_FUNCTIONS

    return {**ARRAY_FUNCTIONS, "inf": math.inf, "nan": math.nan, "__builtins__": {}}


# How tightly a text holds together. Brackets stand only where they must: each costs the compiler time.
_LOGIC, _SUM, _PRODUCT, _SIGN, _ATOM = range(5)

# For each operation its pattern, how tightly the text holds together, and how tightly its operands must.
_Pattern = tuple[str, int, int, int]
_COMMON: dict[str, _Pattern] = {
    "add": ("%s+%s", _SUM, _SUM, _PRODUCT),
    "sub": ("%s-%s", _SUM, _SUM, _PRODUCT),
    "mul": ("%s*%s", _PRODUCT, _PRODUCT, _SIGN),
    "div": ("%s/%s", _PRODUCT, _PRODUCT, _SIGN),
    "neg": ("-%s", _SIGN, _SIGN, _SIGN),
    "lt": ("%s<%s", _LOGIC, _SUM, _SUM),
    "le": ("%s<=%s", _LOGIC, _SUM, _SUM),
    "eq": ("%s==%s", _LOGIC, _SUM, _SUM),
    "pow": ("pow(%s,%s)", _ATOM, _LOGIC, _LOGIC),
    **{name: (f"{name}(%s)", _ATOM, _LOGIC, _LOGIC) for name in ALL_UNARY_FUNCTIONS},
    **{name: (f"{name}(%s,%s)", _ATOM, _LOGIC, _LOGIC) for name in ALL_BINARY_FUNCTIONS},
}
_SCALAR: dict[str, _Pattern] = {
    **_COMMON,
    "and": ("%s and %s", _LOGIC, _SUM, _SUM),
    "or": ("%s or %s", _LOGIC, _SUM, _SUM),
    "not": ("not %s", _LOGIC, _SUM, _SUM),
}
_ARRAY: dict[str, _Pattern] = {
    **_COMMON,
    "div": ("divide(%s,%s)", _ATOM, _LOGIC, _LOGIC),
    "lt": ("less(%s,%s)", _ATOM, _LOGIC, _LOGIC),
    "le": ("less_equal(%s,%s)", _ATOM, _LOGIC, _LOGIC),
    "eq": ("equal(%s,%s)", _ATOM, _LOGIC, _LOGIC),
    "and": ("both(%s,%s)", _ATOM, _LOGIC, _LOGIC),
    "or": ("either(%s,%s)", _ATOM, _LOGIC, _LOGIC),
    "not": ("negate(%s)", _ATOM, _LOGIC, _LOGIC),
}

# Powers written with products and roots. In array code a plain float may reach 1/a too, so it is a call
# there.
_POWERS = {
    Fraction(2): ("{0}*{0}", _PRODUCT),
    Fraction(3): ("{0}*{0}*{0}", _PRODUCT),
    Fraction(1, 2): ("sqrt({0})", _ATOM),
}
_SCALAR_POWERS = {
    **_POWERS,
    Fraction(-1): ("1.0/{0}", _PRODUCT),
    Fraction(-2): ("1.0/({0}*{0})", _PRODUCT),
    Fraction(-1, 2): ("1.0/sqrt({0})", _PRODUCT),
    Fraction(3, 2): ("{0}*sqrt({0})", _PRODUCT),
}
_REPEATING = frozenset({Fraction(2), Fraction(3), Fraction(-2), Fraction(3, 2)})


def _number(constant: Fraction | float) -> str:
    value = as_float(constant)
    return repr(value) if value >= 0 else f"({value!r})"


_LEAVES = frozenset({"quantity", "literal", "const"})


def _leaf(operation: object, value: Any) -> str:
    if operation == "quantity":
        return f"q{value}"
    if operation == "literal":
        return f"l{value}"
    assert isinstance(value, Fraction | float)
    return _number(value)


class _Code:
    """The statements that compute the outputs of one tape."""

    def __init__(self, tape: Tape, patterns: dict[str, _Pattern]) -> None:
        self.tape = tape
        self.patterns = patterns
        self.powers = _SCALAR_POWERS if patterns is _SCALAR else _POWERS
        self.instructions: tuple[tuple[Any, ...], ...] = tape.instructions
        self.text: list[str] = [""] * len(self.instructions)
        self.depth = [0] * len(self.instructions)
        self.tightness = [_ATOM] * len(self.instructions)
        self.interpolants: dict[Interpolant, str] = {}

    def names(self, common: dict[str, Any]) -> dict[str, Any]:
        """What the statements refer to: the functions common to all, and the curves of this tape."""
        if not self.interpolants:
            return common
        own = {
            name: f.function if self.patterns is _SCALAR else f.array_function
            for f, name in self.interpolants.items()
        }
        return {**common, **own}

    def lines(self, result: Callable[[list[str]], str]) -> list[str]:
        """The statements, the last of them returning ``result(texts of the outputs)``."""
        counts, order, guards = self._plan()
        instructions, patterns = self.instructions, self.patterns
        texts, depth, tightness = self.text, self.depth, self.tightness
        body: list[str] = []
        open_guards: tuple[tuple[int, bool], ...] = ()
        for i in order:
            instruction = instructions[i]
            operation = instruction[0]
            pattern = patterns.get(operation)
            # The common cases come first and are written out: this loop is most of the time of generating.
            if pattern is not None:
                form, tight, first, second = pattern
                a = instruction[1]
                text = texts[a] if tightness[a] >= first else f"({texts[a]})"
                deep = depth[a]
                if len(instruction) == 3:
                    b = instruction[2]
                    text = form % (text, texts[b] if tightness[b] >= second else f"({texts[b]})")
                    deep = depth[b] if depth[b] > deep else deep
                else:
                    text = form % text
            elif operation in _LEAVES:
                texts[i] = _leaf(operation, instruction[1])
                continue
            else:
                text, tight = self._special(instruction)
                deep = max([depth[j] for j in operands_of(instruction)])
            if counts[i] > 1 or deep > _DEEPEST:
                guard = guards.get(i, ())
                if guard != open_guards:
                    body.extend(self._opening(open_guards, guard))
                    open_guards = guard
                texts[i] = f"t{i}"
                body.append(f"{' ' * len(guard)}t{i}={text}")
            else:
                texts[i] = text
                depth[i] = deep + 1
                tightness[i] = tight
        body.append(f"return {result([texts[i] for i in self.tape.outputs])}")
        return body

    def _special(self, instruction: tuple[Any, ...]) -> tuple[str, int]:
        """Text of a power, a unit's conversion, a curve or an ``if``, and how tightly it holds together."""
        operation = instruction[0]
        if operation in ("curve", "surface"):
            name = self.interpolants.setdefault(instruction[-1], f"c{len(self.interpolants)}")
            return f"{name}({','.join([self.text[a] for a in instruction[1:-1]])})", _ATOM
        a = self._bracketed(instruction[1])
        if operation == "power":
            r = instruction[2]
            pattern, tight = self.powers.get(r, ("", _ATOM))
            return (pattern.format(a) if pattern else f"pow({a},{_number(r)})"), tight
        if operation == "strip":
            unit = instruction[2]
            shifted = f"({a}-{_number(unit.origin)})" if unit.origin else a
            return f"{shifted}/{_number(unit.factor)}", _PRODUCT
        if operation == "attach":
            unit = instruction[2]
            scaled = f"{a}*{_number(unit.factor)}"
            return (f"{scaled}+{_number(unit.origin)}", _SUM) if unit.origin else (scaled, _PRODUCT)
        first, second = self._bracketed(instruction[2]), self._bracketed(instruction[3])
        if self.patterns is _SCALAR:
            return f"{first} if {a} else {second}", _LOGIC
        return f"choose({a},{first},{second})", _ATOM

    def _bracketed(self, i: int) -> str:
        return self.text[i] if self.tightness[i] == _ATOM else f"({self.text[i]})"

    # --- what becomes a local variable, in which order, and under which conditions ------------------------

    def _plan(self) -> tuple[list[int], Sequence[int], dict[int, tuple[tuple[int, bool], ...]]]:
        instructions = self.instructions
        counts = uses(instructions, self.tape.outputs)
        order = [i for i, count in enumerate(counts) if count]
        branching = False
        for i in order:
            operation = instructions[i][0]
            if operation == "power":
                if instructions[i][2] in _REPEATING:
                    counts[instructions[i][1]] += 1
            elif operation in _BRANCHING:
                branching = True
        if not (branching and self.patterns is _SCALAR):
            return counts, order, {}
        guards = _guards(instructions, self.tape.outputs, counts)
        for guard in guards.values():
            for condition, _ in guard:
                counts[condition] += 1
        order = _order(instructions, self.tape.outputs, guards)
        rank = {i: n for n, i in enumerate(order)}
        nested = {
            i: tuple(sorted(guard, key=lambda pair: (rank[pair[0]], pair[1]))) for i, guard in guards.items()
        }
        return counts, order, nested

    def _opening(self, old: tuple[tuple[int, bool], ...], new: tuple[tuple[int, bool], ...]) -> list[str]:
        """The ``if`` lines that lead from the guards now open to those wanted."""
        shared = 0
        while shared < min(len(old), len(new)) and old[shared] == new[shared]:
            shared += 1
        return [
            f"{' ' * level}if {'' if side else 'not '}{self.text[condition]}:"
            for level, (condition, side) in list(enumerate(new))[shared:]
        ]


_BRANCHING = frozenset({"if", "and", "or"})


def _branches(instruction: tuple[Any, ...]) -> list[tuple[int, tuple[int, bool] | None]]:
    """Operands of an instruction with the condition (index, truth) under which each is used."""
    operation = instruction[0]
    if operation == "if":
        condition, a, b = instruction[1:]
        return [(condition, None), (a, (condition, True)), (b, (condition, False))]
    if operation in ("and", "or"):
        a, b = instruction[1:]
        return [(a, None), (b, (a, operation == "and"))]
    return [(j, None) for j in operands_of(instruction)]


def _guards(
    instructions: Sequence[tuple[Any, ...]], outputs: Sequence[int], counts: list[int]
) -> dict[int, frozenset[tuple[int, bool]]]:
    """For each instruction needed, the conditions that hold whenever it is: common to all its uses."""
    guards: dict[int, frozenset[tuple[int, bool]]] = {i: frozenset() for i in outputs}
    for i in range(len(instructions) - 1, -1, -1):
        if not counts[i]:
            continue
        own = guards[i]
        for j, branch in _branches(instructions[i]):
            here = own if branch is None else own | {branch}
            guards[j] = guards[j] & here if j in guards else here
    return guards


def _order(
    instructions: Sequence[tuple[Any, ...]],
    outputs: Sequence[int],
    guards: dict[int, frozenset[tuple[int, bool]]],
) -> list[int]:
    """An evaluation order in which an instruction follows its operands and the conditions guarding it."""
    order: list[int] = []
    placed: set[int] = set()
    stack = [(i, False) for i in reversed(outputs)]
    while stack:
        i, ready = stack.pop()
        if i in placed:
            continue
        if ready:
            placed.add(i)
            order.append(i)
            continue
        stack.append((i, True))
        stack.extend((j, False) for j in reversed(operands_of(instructions[i])) if j not in placed)
        stack.extend((c, False) for c in sorted((c for c, _ in guards[i]), reverse=True) if c not in placed)
    return order
