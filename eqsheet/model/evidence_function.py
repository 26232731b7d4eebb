"""Evidence of tapes that are judged again and again: the interpreter's steps written out one after the other.

The code takes the tape of the statement itself, instruction by instruction and not simplified, with the steps of
`evaluate`; nothing of it is shared with the functions a solver runs, so a judgement stays one of its own. It gives
the same floats as `evaluate_with_evidence`.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import lru_cache
from typing import Any

from eqsheet.model.evaluate import (
    EVIDENCE,
    INTERPOLATED,
    OF_ATTRIBUTE,
    ROUNDING,
    STEPS,
    TRUTH,
    UNDERFLOW,
    Evidence,
    evaluate_with_evidence,
    interpolated_evidence,
    is_exact,
    product_error,
    rounding_of,
    unary_evidence,
)
from eqsheet.model.functions import UNARY, as_float
from eqsheet.model.interpolation import value_or_nan
from eqsheet.model.tape import Tape

MEMORY = 1 << 12
# Writing and compiling takes as long as interpreting about thirty times.
_CALLS_WORTH_COMPILING = 24

OutputEvidence = tuple[tuple[float, ...], tuple[float, ...], tuple[float, ...]]
Judge = Callable[[Sequence[float], Sequence[float], Sequence[float]], OutputEvidence]


def evidence_of_outputs(
    tape: Tape, quantities: Sequence[float], literals: Sequence[float], errors: Sequence[float]
) -> OutputEvidence:
    """Values, sizes and error bounds of the outputs; parameters and rules as in `evaluate_with_evidence`."""
    exact = 0 if any(errors) else tape.quantities
    return _of_outputs(tape, exact)(quantities, literals, errors)


def evidence_of_equations(tape: Tape, exact: int) -> Judge:
    """Residuals, sizes and error bounds of equations, from a tape with the outputs left and right of each in turn.

    Parameters
    ----------
    tape : Tape
    exact : int
        The first so many quantities have no errors.

    Returns
    -------
    callable
        Quantities, literals and errors of the quantities to left - right, the larger size and the sum of the bounds
        of both sides, for each equation.
    """
    return _of_equations(tape, exact)


@lru_cache(maxsize=MEMORY)
def _of_outputs(tape: Tape, exact: int) -> Judge:
    return _worth_compiling(tape, exact, _Outputs())


@lru_cache(maxsize=MEMORY)
def _of_equations(tape: Tape, exact: int) -> Judge:
    return _worth_compiling(tape, exact, _Equations())


class _Outputs:
    """What is told of a tape: all outputs."""

    def of(self, tape: Tape, evidence: Evidence) -> OutputEvidence:
        """From what the interpreter says."""
        return (
            tuple([evidence.values[o] for o in tape.outputs]),
            tuple([evidence.sizes[o] for o in tape.outputs]),
            tuple([evidence.errors[o] for o in tape.outputs]),
        )

    def written(self, outputs: Sequence[int], bound: Callable[[int], str]) -> list[list[str]]:
        """As code."""
        return [[f"v{o}" for o in outputs], [f"s{o}" for o in outputs], [bound(o) for o in outputs]]


class _Equations:
    """What is told of a tape: pairs of outputs as the sides of equations."""

    def of(self, tape: Tape, evidence: Evidence) -> OutputEvidence:
        """From what the interpreter says."""
        pairs = list(zip(tape.outputs[::2], tape.outputs[1::2]))
        values, sizes, errors = evidence.values, evidence.sizes, evidence.errors
        return (
            tuple([values[a] - values[b] for a, b in pairs]),
            tuple([max(sizes[a], sizes[b]) for a, b in pairs]),
            tuple([errors[a] + errors[b] for a, b in pairs]),
        )

    def written(self, outputs: Sequence[int], bound: Callable[[int], str]) -> list[list[str]]:
        """As code."""
        pairs = list(zip(outputs[::2], outputs[1::2]))
        return [
            [f"v{a}-v{b}" for a, b in pairs],
            [f"max(s{a},s{b})" for a, b in pairs],
            [f"{bound(a)}+{bound(b)}" for a, b in pairs],
        ]


def _worth_compiling(tape: Tape, exact: int, told: _Outputs | _Equations) -> Judge:
    """Interprets until it has been called often enough to pay for code."""
    calls = 0
    compiled: Judge | None = None

    def judge(
        quantities: Sequence[float], literals: Sequence[float], errors: Sequence[float]
    ) -> OutputEvidence:
        nonlocal calls, compiled
        if compiled is not None:
            return compiled(quantities, literals, errors)
        calls += 1
        if calls >= _CALLS_WORTH_COMPILING:
            compiled = written_out(tape, exact, told)
        return told.of(tape, evaluate_with_evidence(tape, quantities, literals, errors))

    return judge


def written_out(tape: Tape, exact: int, told: _Outputs | _Equations | None = None) -> Judge:
    """The function of one tape.

    Parameters
    ----------
    tape : Tape
    exact : int
        The first so many quantities are taken to have no errors.
    """
    code = _Code(exact)
    for number, instruction in enumerate(tape.instructions):
        code.write(number, instruction)
    groups = (told or _Outputs()).written(tape.outputs, code.bound)
    body = "\n ".join([*code.lines, "return " + ",".join([f"({','.join(g)},)" for g in groups])])
    exec(compile(f"def judge(q,l,e):\n {body}\n", "<evidence>", "exec"), code.names)
    judge: Judge = code.names["judge"]
    return judge


class _Code:
    """Lines that compute value v, size s and error bound b of each instruction, by its number."""

    def __init__(self, exact: int) -> None:
        self.exact = exact
        self.lines: list[str] = []
        self.names: dict[str, Any] = {
            "R": ROUNDING,
            "U": UNDERFLOW,
            "product_error": product_error,
            "judge_div": EVIDENCE["div"],
            "unary_evidence": unary_evidence,
            "interpolated_evidence": interpolated_evidence,
            "value_or_nan": value_or_nan,
        }
        self._exact: set[int] = set()  # instructions whose error is zero whatever the values
        self._measured: set[int] = set()  # instructions whose magnitude m has a name

    def bound(self, number: int) -> str:
        """The error bound of an instruction."""
        return "0.0" if number in self._exact else f"b{number}"

    def magnitude(self, number: int) -> str:
        """The magnitude of an instruction's value, worked out once."""
        if number not in self._measured:
            self._measured.add(number)
            self.lines.append(f"m{number}=abs(v{number})")
        return f"m{number}"

    def write(self, i: int, instruction: tuple[Any, ...]) -> None:
        """Add the lines of instruction number i."""
        operation, *operands = instruction
        if operation == "quantity":
            self.lines.append(f"v{i}=q[{operands[0]}]; m{i}=s{i}=abs(v{i})")
            self._measured.add(i)
            if operands[0] < self.exact:
                self._exact.add(i)
            else:
                self.lines.append(f"b{i}=abs(e[{operands[0]}])")
        elif operation == "literal":
            self.lines.append(
                f"v{i}=l[{operands[0]}]; m{i}=s{i}=abs(v{i}); b{i}=2.0*R*m{i} if v{i}%1.0 else 0.0"
            )
            self._measured.add(i)
        elif operation == "const":
            value = as_float(operands[0])
            error = 0.0 if is_exact(operands[0], value) else rounding_of(value)
            self.names |= {f"v{i}": value, f"m{i}": abs(value), f"s{i}": abs(value), f"b{i}": error}
            self._measured.add(i)
            if not error:
                self._exact.add(i)
        elif operation == "mul":
            self._write_product(i, *operands)
        elif operation == "div":
            self._write_quotient(i, *operands)
        elif operation in ("add", "sub"):
            a, b = operands
            self.lines.append(f"v{i}=v{a}{'+' if operation == 'add' else '-'}v{b}")
            self.lines.append(f"s{i}=max(s{a},s{b},{self.magnitude(i)})")
            self.lines.append(f"b{i}={self.bound(a)}+{self.bound(b)}+(R*m{i}+U if v{i} else 0.0)")
        elif operation == "neg":
            (a,) = operands
            self.lines.append(f"v{i}=-v{a}; s{i}=s{a}; b{i}={self.bound(a)}")
        else:
            self._write_call(i, operation, operands)

    def _write_product(self, i: int, a: int, b: int) -> None:
        """The lines of a product; what makes no number of 0 times infinity is left to the interpreter's function."""
        self.lines.append(f"v{i}=v{a}*v{b}; s{i}=s{a}*s{b} if s{a} and s{b} else 0.0")
        first, second = self.bound(a), self.bound(b)
        parts = []
        if b not in self._exact:
            parts.append(f"{self.magnitude(a)}*{second}")
        if a not in self._exact:
            parts.append(f"{self.magnitude(b)}*{first}")
        if len(parts) == 2:
            parts.append(f"{first}*{second}")
        if parts:
            self.lines.append(f"h={'+'.join(parts)}")
            self.lines.append(f"if h!=h: h=product_error(v{a},{first},v{b},{second})")
        handed_on = "h+" if parts else ""
        rounding = f"(R*{self.magnitude(i)}+U if v{i} else (U if v{a} and v{b} else 0.0))"
        self.lines.append(f"b{i}={handed_on}{rounding}")

    def _write_quotient(self, i: int, a: int, b: int) -> None:
        """The lines of a quotient of numbers that are not zero; any other is left to the interpreter's function."""
        self.names["step_div"] = STEPS["div"]
        first, second = self.bound(a), self.bound(b)
        top, below = self.magnitude(a), self.magnitude(b)
        spread = "+".join([x for x in (first, "" if b in self._exact else f"h*{second}") if x and x != "0.0"])
        room = below if b in self._exact else f"{below}-{second}"
        judged = f"judge_div(v{i},v{a},s{a},{first},v{b},s{b},{second})"
        self._measured.add(i)
        self.lines += [
            f"if 0.0<{top} and 0.0<{below}:",
            f" v{i}=v{a}/v{b}; m{i}=h=abs(v{i}); r={room}; s{i}=s{a}/{below}*(s{b}/{below})",
            f" b{i}={f'({spread})/r+' if spread else ''}(R*h+U)",
            f" if not (h and r>0.0 and b{i}==b{i} and s{i}>0.0): s{i},b{i}={judged}",
            f"else: v{i}=step_div(v{a},v{b}); m{i}=abs(v{i}); s{i},b{i}={judged}",
        ]

    def _write_call(self, i: int, operation: str, operands: list[Any]) -> None:
        """The step and the evidence of an operation by calls of the interpreter's own functions."""
        step, judge = f"step_{operation}", f"judge_{operation}"
        if operation in INTERPOLATED:
            *inputs, self.names[f"x{i}"] = operands
            values = ",".join(f"v{a}" for a in inputs)
            sizes, bounds = ",".join(f"s{a}" for a in inputs), ",".join(map(self.bound, inputs))
            self.lines.append(f"v{i}=value_or_nan(x{i},{values})")
            self.lines.append(f"s{i},b{i}=interpolated_evidence(v{i},x{i},[{values}],[{sizes}],[{bounds}])")
        elif operation in OF_ATTRIBUTE:
            a, self.names[f"x{i}"] = operands
            self.names |= {step: OF_ATTRIBUTE[operation], judge: EVIDENCE[operation]}
            self.lines.append(
                f"v{i}={step}(v{a},x{i}); s{i},b{i}={judge}(v{i},v{a},s{a},{self.bound(a)},x{i})"
            )
        else:
            self.names[step] = STEPS[operation]
            self.lines.append(f"v{i}={step}({','.join(f'v{a}' for a in operands)})")
            if operation in TRUTH:
                self.lines.append(f"s{i}=b{i}=0.0")
            elif operation in UNARY:
                (a,) = operands
                self.lines.append(f"s{i},b{i}=unary_evidence({operation!r},v{i},v{a},s{a},{self.bound(a)})")
            elif operation == "if":
                c, a, b = operands
                self.lines.append(f"s{i},b{i}=(s{a},{self.bound(a)}) if v{c} else (s{b},{self.bound(b)})")
            else:
                a, b = operands
                self.names[judge] = EVIDENCE[operation]
                self.lines.append(
                    f"s{i},b{i}={judge}(v{i},v{a},s{a},{self.bound(a)},v{b},s{b},{self.bound(b)})"
                )
