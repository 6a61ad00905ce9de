"""The one error family: what was wrong, what is allowed, why, and what to do."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Fault:
    """One unusable input, as data: every message on a screen or in a file is made from this.

    ``quantity`` is in words ("exhaust temperature"), ``name`` the name in code ("T_exhaust"),
    ``limit`` what is allowed, written to follow "needs", ``index`` the place in an array.
    """

    quantity: str
    value: object
    unit: str
    limit: str
    why: str = ""
    hint: str = ""
    name: str = ""
    index: tuple[int, ...] | None = None

    def __str__(self) -> str:
        place = f" at position {', '.join(map(str, self.index))}" if self.index else ""
        unit = f" {self.unit}" if self.unit not in ("", "1") else ""  # "1" is the unit of what has none
        value = f"{self.value:.7g}" if isinstance(self.value, float) else str(self.value)
        lines = [f"{self.quantity}{place}: got {value}{unit}, needs {self.limit}"]
        lines += [f"  - {line}" for line in (self.why, self.hint) if line]
        return "\n".join(lines)


class InputError(ValueError):
    """One or more unusable inputs; ``faults`` holds all of them, the message one block for each."""

    def __init__(self, *faults: Fault):
        self.faults = faults
        super().__init__("\n".join(map(str, faults)))

    def __reduce__(self):
        return (type(self), self.faults)
