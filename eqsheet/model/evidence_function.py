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
    return (_with_errors if any(errors) else _without_errors)(tape)(quantities, literals, errors)


@lru_cache(maxsize=MEMORY)
def _with_errors(tape: Tape) -> Judge:
    return _worth_compiling(tape, True)


@lru_cache(maxsize=MEMORY)
def _without_errors(tape: Tape) -> Judge:
    return _worth_compiling(tape, False)


def _worth_compiling(tape: Tape, errors_given: bool) -> Judge:
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
            compiled = written_out(tape, errors_given)
        evidence = evaluate_with_evidence(tape, quantities, literals, errors)
        return (
            tuple([evidence.values[o] for o in tape.outputs]),
            tuple([evidence.sizes[o] for o in tape.outputs]),
            tuple([evidence.errors[o] for o in tape.outputs]),
        )

    return judge


def written_out(tape: Tape, errors_given: bool) -> Judge:
    """The function of one tape.

    Parameters
    ----------
    tape : Tape
    errors_given : bool
        Whether quantities come with errors; without, all of them are taken to be zero.
    """
    code = _Code(errors_given)
    for number, instruction in enumerate(tape.instructions):
        code.write(number, instruction)
    outputs = [
        "(" + "".join(f"{letter}{code.stands_for(letter, o)}," for o in tape.outputs) + ")"
        for letter in "vsb"
    ]
    body = "\n ".join([*code.lines, f"return {','.join(outputs)}"])
    exec(compile(f"def judge(q,l,e):\n {body}\n", "<evidence>", "exec"), code.names)
    judge: Judge = code.names["judge"]
    return judge


class _Code:
    """Lines that compute value v, size s and error bound b of each instruction, by its number."""

    def __init__(self, errors_given: bool) -> None:
        self.errors_given = errors_given
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

    def stands_for(self, letter: str, number: int) -> int:
        """The number itself; errors that are always zero get a name first."""
        if letter == "b" and number in self._exact:
            self.lines.append(f"b{number}=0.0")
        return number

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
            if self.errors_given:
                self.lines.append(f"b{i}=abs(e[{operands[0]}])")
            else:
                self._exact.add(i)
        elif operation == "literal":
            self.lines.append(f"v{i}=l[{operands[0]}]; m{i}=s{i}=abs(v{i})")
            self._measured.add(i)
            self._exact.add(i)
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
