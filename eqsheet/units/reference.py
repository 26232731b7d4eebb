"""The published list of units as a page, ``grammar/UNITS.md``.

``python -m eqsheet.units.reference`` prints it.
"""

from __future__ import annotations

import math
import sys
from fractions import Fraction

from eqsheet.units.dimension import Dimension
from eqsheet.units.display import DEFAULT_UNITS, PRICED_BY
from eqsheet.units.table import ALIASES, AMBIGUOUS, PREFIXES, SPELLINGS, UNITS

_HEAD = """\
# Units

The units a worksheet may use; written by `python -m eqsheet.units.reference` from `grammar/units.toml`.

- A unit is a symbol, or symbols joined by `*`, `·` and `/`, with powers `^2`, `^-1`, `^(1/3)`: `W/(m^2*K)`.
- Case counts. A prefix stands directly before its symbol; each unit takes the prefixes named here and no
  others. Micro is `µ` (either of its two characters) or `u`: `µm`, `um`.
- A *reading* has an origin: `degC`, `degF` and the gauge pressures, which stand on the ambient pressure.
  Inside a compound unit, raised to a power, and after `±`, a reading unit stands for a difference:
  `W/(m^2*degC)` is `W/(m^2*K)`, and `mbarg/m` is `mbar/m`.
- `bara`, `psia` and their like are plain units of pressure whose name says that the value is absolute.
- `Nm^3` and `Sm^3` are symbols of their own, for an amount of gas; `Nm` alone is refused (write `N*m`).
- Angles are plain numbers: 1 rad is 1. `rpm` is 2*pi/60 rad/s. `Hz` counts cycles.
- Money has no rate of exchange. Other units of a worksheet's own are made with `new unit`.
"""


def _row(symbol: str) -> str:
    ratio, pi_power, bases, origin, _, _, bare, prefixes, _, name = UNITS[symbol]
    size = f"{float(Fraction(ratio)) * math.pi**pi_power:.15g}"
    unit = Dimension.of(dict(bases)).text
    in_base_units = size if unit == "1" else f"{size} {unit}"
    zero = {"": "", "ambient": ", from ambient pressure"}.get(origin)
    if zero is None:
        zero = f", from {float(Fraction(origin)):.6g} K"
    others = [other for other, meant in ALIASES.items() if meant == symbol]
    also = f"; also `{'`, `'.join(others)}`" if others else ""
    only = "" if bare else "only "
    return f"| `{symbol}` | {name}{also} | {in_base_units}{zero} | {only}{' '.join(prefixes)} |"


def reference() -> str:
    """The page in Markdown."""
    parts = [_HEAD]
    for trade in dict.fromkeys(row[8] for row in UNITS.values()):
        rows = [_row(symbol) for symbol, row in UNITS.items() if row[8] == trade]
        table = ["| unit | what it is | in SI base units | prefixes |", "|---|---|---|---|", *rows]
        parts.append(f"## {trade}\n\n" + "\n".join(table) + "\n")
    powers = ", ".join(f"`{prefix}` 1e{power}" for prefix, power in PREFIXES.items())
    parts.append(f"## Prefixes\n\n{powers}.\n")
    refused = [f"| `{symbol}` | {why} | {cure} |" for symbol, (why, cure) in AMBIGUOUS.items()]
    parts.append(
        "## Refused, because they mean different things\n\n| written | why | help |\n|---|---|---|\n"
        + "\n".join(refused)
        + "\n"
    )
    spellings = ", ".join(f"`{written}` (`{instead}`)" for written, instead in SPELLINGS.items())
    parts.append(f"## Refused, with the way to write them\n\n{spellings}.\n")
    defaults = "\n".join(f"| {what} | `{unit}` |" for what, unit in DEFAULT_UNITS)
    priced = ", ".join(f"{what} by the `{unit}`" for what, unit in PRICED_BY)
    parts.append(
        "## Units of results where the worksheet names none\n\n"
        "They follow from the dimension alone. A reading of temperature is shown in `degC`, a reading of\n"
        f"pressure in `kPaa`. Prices: {priced}, else by the unit of the table. A dimension that\n"
        "is not in the table is shown in SI base units; 1/s is never shown as Hz.\n\n"
        f"| dimension | unit |\n|---|---|\n{defaults}\n"
    )
    return "\n".join(parts)


if __name__ == "__main__":
    sys.stdout.write(reference())
