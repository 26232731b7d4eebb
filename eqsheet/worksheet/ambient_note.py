"""What gauge pressures stand on, and where a product takes one as an absolute pressure.

A gauge pressure is kept as what it is, a place on the absolute scale. So ``p*V = n*R*T`` is right as it stands,
but ``sigma = p*D/(2*t)`` takes 11 bar where ``p`` is 10 barg: for that the ambient pressure must be subtracted.
"""

from __future__ import annotations

from collections.abc import Iterator

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, note
from eqsheet.model.system import EquationSystem, Place
from eqsheet.units.dimension import Dimension
from eqsheet.units.display import format_value
from eqsheet.worksheet.places import line_words, quoted, span_of
from eqsheet.worksheet.prepare import Prepared

_PRESSURE = Dimension.of({"kg": 1, "m": -1, "s": -2})


def ambient_note(prepared: Prepared) -> Diagnostic:
    """The note that a worksheet with gauge pressures ends in."""
    system = prepared.system
    text = format_value(system.ambient / 1000.0)
    given = system.number("ambient")
    if given is None:
        place: tuple[Label, ...] = ()
        said = f"gauge pressures stand on the standard atmosphere, {text} kPa"
        help = "write `ambient = 84 kPa` or the like for another place"
    else:
        place = (Label(span_of(system, system.first_places[given])),)
        said = f"gauge pressures stand on the ambient pressure, {text} kPa"
        help = ""
    return note("ambient-pressure", said, *place, notes=_absolute(prepared), help=help)


def _absolute(prepared: Prepared) -> tuple[str, ...]:
    found = list(_in_products(prepared))
    if not found:
        return ()
    names = dict.fromkeys(name for name, _ in found)
    lines = line_words(prepared.system, dict.fromkeys(place for _, place in found))
    count = "counts" if len(names) == 1 else "count"
    return (
        f"{quoted(names)} {count} as absolute in the products of {lines}; the pressure above the surroundings "
        "is the difference from the ambient one",
    )


def _in_products(prepared: Prepared) -> Iterator[tuple[str, Place]]:
    """Readings of pressure that are factors as they stand, with the place of their equation."""
    system: EquationSystem = prepared.system
    for item in system.written:
        instructions = item.formula.tape.instructions
        for operation, *operands in instructions:
            if operation not in ("mul", "div"):
                continue
            for operand in operands:
                kind, *rest = instructions[operand]
                if kind != "quantity":
                    continue
                quantity = item.formula.quantities[rest[0]]
                if prepared.kinds[quantity] == "reading" and prepared.dimensions[quantity] == _PRESSURE:
                    yield system.names[quantity], item.place
