"""What comes up while a formula is lowered: validity conditions met, and why there can be no formula."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

Place2: TypeAlias = tuple[int, int]


class NeedsMembers(Exception):
    """The shape of the formula depends on the member, so that each member must be lowered by itself."""


@dataclass(frozen=True, slots=True)
class ConditionMet:
    """A validity condition written out while lowering: its instruction, guards, text and place."""

    instruction: int
    guards: tuple[tuple[int, bool], ...]
    text: str
    place: Place2


class Poisoned(Exception):
    """The expression cannot be lowered; the finding that says why is already noted."""
