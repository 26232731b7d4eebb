"""A pipe network of many branches from CSV, in a folder of its own."""

from __future__ import annotations

from pathlib import Path

# One branch in so many joins the two legs of the ladder.
RUNG = 3


def write_network(folder: Path, branches: int) -> Path:
    """A ladder of two long legs with rungs, fed at one end; returns the worksheet's path.

    Every node but the first takes a demand; every branch has a loss by the square of its flow.
    """
    length = branches // RUNG
    nodes = [f"{leg}{i}" for i in range(length + 1) for leg in ("a", "b")]
    lines = []
    for i in range(length):
        lines += [(f"a{i}", f"a{i + 1}"), (f"b{i}", f"b{i + 1}"), (f"a{i + 1}", f"b{i + 1}")]
    demand = [f"{name},0.01" for name in nodes if name != "a0"]
    (folder / "node.csv").write_text("node,q in L/s\na0,-\n" + "\n".join(demand) + "\n", encoding="utf-8")
    rows = [f"l{k},{a},{b},{20 + k % 7}" for k, (a, b) in enumerate([("a0", "b0"), *lines])]
    (folder / "line.csv").write_text(
        "line,a of node,b of node,k in kPa*s^2/L^2\n" + "\n".join(rows) + "\n", encoding="utf-8"
    )
    path = folder / "network.eqsheet"
    path.write_text(
        """rows node from "node.csv"
rows line from "line.csv"
for l in line:
    p[a[l]] - p[b[l]] = k[l]*Q[l]*abs(Q[l])
    Q[l] near 0.1 L/s
for n in node:
    sum(Q[l] for l in line if b[l] = n) - sum(Q[l] for l in line if a[l] = n) = q[n]
    p[n] near 3 bar
p[a0] = 5 bar
""",
        encoding="utf-8",
    )
    return path
