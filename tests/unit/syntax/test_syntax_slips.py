"""Each common slip of writing gives its own code, at the guilty text, with the cure."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.source import Source
from eqsheet.syntax.parse import parse_document

# text of a worksheet, code, guilty text, words of the cure
SLIPS = {
    "two names side by side": ("x = a b", "implied-product", "a b", "write a*b"),
    "name with a space": ("drop in_pipe = 5 bar", "implied-product", "drop in_pipe", "drop_in_pipe for one name"),
    "number and bracket": ("x = 2(a + b)", "implied-product", "2(", "write 2*(a + b)"),
    "bracket and bracket": ("x = (a)(b)", "implied-product", ")(", "write (a)*(b)"),
    "number and call": ("x = 5 sin(y)", "implied-product", "5 sin", "write 5*sin(y)"),
    "call through an instance": (
        "y = supply.head(5 m)",
        "implied-product",
        "head(",
        "write supply.head*(5 m); definitions and curves belong to no instance, so they are called as head(5 m)",
    ),
    "call through a member": ("y = p[l].Q(x)", "implied-product", "Q(", "write p[l].Q*(x); definitions and curves"),
    "call of a constant": ("y = const.R(x)", "implied-product", "R(", "for a product write const.R*(x)"),
    "two blanks before a unit": ("x = 5  mm", "unit-apart", "5  mm", "write 5 mm"),
    "a tab before a unit": ("x = 5\tmm", "unit-apart", "5\tmm", "write 5 mm"),
    "pattern in a show": ("show v, c_* in mol/L", "pattern-form", "*", "shown anyway"),
    "everything shown": ("show *", "pattern-form", "*", "shown anyway"),
    "bounds for everything": ("* within 0 ..", "pattern-form", "*", "c_* within 0 mol/L .."),
    "pattern that begins with a star": ("*_in near 3 bar", "pattern-form", "*", "have in common"),
    "function without brackets": ("x = sqrt 2", "implied-product", "sqrt 2", "write sqrt(2)"),
    "power by stars": ("x = a**2", "power-sign", "**", "write ^"),
    "double equals": ("x == 2", "double-equals", "==", "single ="),
    "assignment": ("x := 2", "colon-equals", ":=", "write ="),
    "unequal by angles": ("require x <> 2", "comparison-sign", "<>", "write !="),
    "equal before less": ("require x =< 2", "comparison-sign", "=<", "write <="),
    "ampersands": ("x = if a < b && b < c then 1 else 2", "logical-sign", "&&", "write and"),
    "braces": ("x = {a}", "bracket-kind", "{", "( and )"),
    "semicolon": ("x = 1; y = 2", "two-statements", ";", "one statement a line"),
    "tilde": ("x ~ 5", "guess-sign", "~", "x near 5"),
    "percent after a name": ("x = a % b", "percent-sign", "%", "write 5 %"),
    "slashes": ("x = 3 // bore", "comment-sign", "//", "starts with #"),
    "missing bracket": ("x = (a + b", "bracket-not-closed", "(", "write )"),
    "missing bracket, next statement intact": ("x = f(a\ny = 2", "bracket-not-closed", "(", "write )"),
    "bracket too many": ("x = a + b)", "bracket-not-opened", ")", "delete it"),
    "bracket of the other kind": ("x = (a]", "bracket-mismatch", "]", "write )"),
    "empty brackets": ("x = f()", "empty-brackets", "()", "leave the brackets out"),
    "decimal comma": ("D = 52,5 mm", "decimal-comma", "52,5", "write 52.5"),
    "unit after a bracket": ("P = (1 + 2) mmHg", "implied-product", ") mmHg", "(1 + 2)*1 mmHg"),
    "inch after a bracket": ("t = (3/8) in", "implied-product", ") in", "(3/8)*1 in"),
    "tolerance sign of three": ("D = 52.5 mm +/- 0.1 mm", "tolerance-sign", "+/-", "write ± or +-"),
    "decimal comma after groups": ("D = 1.052,5 mm", "decimal-comma", "1.052,5", "write 1052.5"),
    "decimal comma in a list": ("y = x valid 0,7 <= Pr", "decimal-comma", "0,", "point"),
    "comma for thousands": ("x = 1,000,000", "digit-groups", "1,000,000", "write 1000000"),
    "blank for thousands": ("x = 1 000", "digit-groups", "1 000", "write 1000"),
    "point at the end": ("x = 1.", "number-form", "1.", "1.0"),
    "point at the start": ("x = .5", "number-form", ".5", "0.5"),
    "too large": ("x = 1e400", "number-out-of-range", "1e400", "another unit"),
    "too small": ("x = 1e-400", "number-out-of-range", "1e-400", "another unit"),
    "keyword as a name": ("valid = 3", "reserved-word", "valid", "another name"),
    "keyword in an expression": ("x = 2*for", "reserved-word", "for", "another name"),
    "statement word as a name": ("show = 3", "reserved-word", "show", "another name"),
    "nothing on the right": ("x =", "side-missing", "=", "leave the line out"),
    "nothing on the left": ("= 3", "side-missing", "=", "both sides"),
    "two equals signs": ("x = y = z", "two-equals", "=", "two equations"),
    "no equals sign": ("a + b", "equals-missing", "a + b", "near 5"),
    "comparison for an equation": ("x < 3", "comparison-in-equation", "<", "require x < 3"),
    "limit without within": ("require v = 3 m/s", "limit-equality", "v = 3 m/s", "within 1 %"),
    "within without =": ("require v < 3 within 1", "limit-within", "within 1", "require a = b"),
    "tolerance on an expression": ("D = 2*3 mm ± 1 mm", "tolerance-not-on-known", "± 1 mm", "worked out"),
    "tolerance in brackets": ("x = (5 ± 1) mm", "tolerance-not-on-known", "±", "D = 52.5 mm ± 0.1 mm"),
    "tolerance by a name": ("x = 5 mm ± t", "tolerance-form", "t", "number worked out"),
    "multiplication sign": ("x = a×b", "foreign-character", "×", "write *"),
    "division sign": ("x = a÷b", "foreign-character", "÷", "write /"),
    "typographic minus": ("x = a − b", "foreign-character", "−", "write a hyphen"),
    "superscript": ("A = 5 m²", "foreign-character", "²", "write ^2"),
    "subscript": ("T₂ = 5 K", "foreign-character", "₂", "T2"),
    "vulgar fraction": ("x = ½", "foreign-character", "½", "(1/2)"),
    "full-width equals": ("x ＝ 3", "foreign-character", "＝", "write ="),
    "full-width letter": ("Ｔ = 3", "foreign-character", "Ｔ", "write T"),
    "no-break space": ("x = 5\u00a0mm", "foreign-character", "\u00a0", "ordinary space"),
    "typographic quotes": ("x = y[“a”]", "foreign-character", "“", 'write "'),
    "degree sign": ("T = 5 °C", "foreign-character", "°", "degC"),
    "less or equal in one sign": ("require x ≤ 3", "foreign-character", "≤", "write <="),
    "unit in brackets": ("p = 5 [bar]", "unit-in-brackets", "[bar]", "write 5 bar"),
    "shown unit in brackets": ("show p in [bar]", "unit-in-brackets", "[bar]", "write in bar"),
    "unit with spaces": ("show V in L / min", "unit-form", "/", "kJ/(kg*K)"),
    "no unit after in": ("show V in", "unit-missing", "n", "L/min"),
    "decimal power of a unit": ("x = 5 m^0.5", "unit-power", "0.5", "^(1/2)"),
    "power after a unit": ("x = 5 m ^2", "power-after-unit", "^", "(5 m)^2"),
    "unit after a power": ("m = 10^3 kg", "unit-in-exponent", "kg", "1e3 kg"),
    "if without else": ("x = if a < b then 3", "else-missing", "if", "else b"),
    "if without then": ("x = if a < b 3 else 4", "then-missing", "if", "then a"),
    "then without if": ("x = a then b", "stray-then", "then", "if condition"),
    "if as a statement": ("if a < b then x = 3 else x = 4", "if-statement", "=", "x = if"),
    "if behind": ("x = 3 if a < b else 4", "if-order", "if", "if condition then a"),
    "elif": ("x = if a < b then 1 elif b < c then 2 else 3", "else-if", "1 elif", "else if"),
    "if after an operator": ("x = 2*if a < b then 1 else 2", "if-without-brackets", "if", "a + (if"),
    "number as a condition": ("x = if a then 1 else 2", "number-as-condition", "a", "x > 0"),
    "condition as a number": ("x = (a < b) + 1", "condition-as-number", "(a < b)", "if condition"),
    "let": ("let x = 3", "needless-word", "let", "leave the word out"),
    "guess as a word": ("guess x = 3", "needless-word", "guess", "x near 5"),
    "misspelt statement": ("requre v < 3", "misspelt-word", "requre", "require"),
    "capital statement": ("Show v", "misspelt-word", "Show", "show"),
    "misspelt word after a name": ("x nera 5", "misspelt-word", "nera", "near"),
    "valid at the start": ("valid Re > 3", "misplaced-word", "valid", "ends an equation"),
    "bounds without dots": ("x within 3", "bounds-form", "3", "0 .."),
    "range in an equation": ("x = 1..3", "stray-range", "..", "for i in 1..N"),
    "broken range": ("for i in 0.5..3:\n    x[i] = 1", "range-not-whole", "0.5", "1..10"),
    "operator at the end": ("x = a +", "operand-missing", "+", "belongs there"),
    "comma at the end": ("show x,", "operand-missing", ",", "belongs there"),
    "label alone": ("energy:", "label-alone", "energy:", "energy: Q ="),
    "label of a member": ("T[1]: x = 3", "label-form", ":", "energy: Q ="),
    "colon without a group": ("x = 5:", "stray-colon", ":", "leave the colon out"),
    "no colon": ("for i in 1..N\n    x[i] = 1", "colon-missing", "N", "colon"),
    "no colon at use": ("use pipe as p\n    L = 1 m", "colon-missing", "p", "colon"),
    "colon and nothing below": ("template pipe:\nx = 3", "empty-group", ":", "four spaces"),
    "group on the line": ("for i in 1..N: x[i] = 3", "group-on-line", "x", "new line"),
    "indented for nothing": ("x = 1\n    y = 2", "stray-indentation", "y = 2", "lines above start"),
    "tab among spaces": ("for i in 1..2:\n    x[i] = 1\n\ty[i] = 2", "mixed-indentation", "\t", "spaces only"),
    "file without quotes": ("include glycol.eqsheet", "file-name-quotes", "glycol.eqsheet", '"glycol'),
    "quote left open": ('x = y["a]', "quote-not-closed", '"a]', "both quotes"),
    "quoted name as a number": ('x = "a"', "text-as-number", '"a"', "subscripts"),
    "interpolation by another name": ("curve h(Q) in m by spline:\n 1 2", "interpolation", "spline", "by line"),
    "curve of two": ("curve h(Q, n) in m:\n 1 2", "curve-arguments", "Q, n", "surface"),
    "comma in a table": ("rows s: z\n    a, 1", "table-comma", ",", "leave the comma out"),
    "decimal comma in a table": ("rows s: z\n    a 1,5", "decimal-comma", "1,5", "1.5"),
    "aggregate by another name": ("x = mean(y[i] for i in 1..3)", "not-an-aggregate", "mean", "sum, prod"),
    "index over a number": ("x = sum(y[i] for i in 3)", "index-set", "3", "1..N"),
    "unequal in a chain": ("x = sum(i for i in s if 1 < i != 3)", "unequal-in-chain", "!=", "and"),
    "coverage by another letter": ("x = 5 ± 1 (n=2)", "coverage-factor", "n", "(k=2)"),
    "something else": ("show 5", "cannot-be-read", "5", "a name"),
}  # fmt: skip


def diagnostics_of(text: str) -> tuple[Diagnostic, ...]:
    return parse_document(Source("sheet", text))[1]


@pytest.mark.parametrize("name", SLIPS)
def test_slip_has_its_code_its_place_and_its_cure(name: str) -> None:
    text, code, guilty, cure = SLIPS[name]
    found = diagnostics_of(text)
    assert [d.code for d in found] == [code]
    assert found[0].span is not None
    assert found[0].span.text == guilty
    assert cure in found[0].help.replace("`", "")


def test_a_line_that_begins_with_an_operator_is_said_to_go_on() -> None:
    found = diagnostics_of("x = 3\n-y + z = 2")
    assert [d.code for d in found] == ["two-equals"]
    assert "goes on with the statement above" in found[0].notes[0]


@pytest.mark.parametrize(
    "broken", ["x = (a + b", "x = 2(", "x = ]", "x =", "x = a +", 'x = y["', "²", "x := "]
)
def test_a_broken_line_hides_no_slip_of_another(broken: str) -> None:
    found = diagnostics_of(f"a == 1\n{broken}\nb == 2\nc = 3")
    assert [d.span.line for d in found if d.code == "double-equals" and d.span] == [1, 3]
    assert len(found) == 3


def test_message_without_a_rule_of_its_own_names_no_terminal() -> None:
    found = diagnostics_of("define f = 3\nuse pipe\nrows bus a\nnew unit 5\nfor i 1..3:\n    x[i] = 2")
    assert {d.code for d in found} == {"cannot-be-read"}
    for diagnostic in found:
        assert not any(word in diagnostic.help for word in ("LPAR", "NAME", "COLON", "NUMBER", "$END"))
