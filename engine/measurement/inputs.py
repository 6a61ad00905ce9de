"""What is known about an input: its value, and why it may be wrong, cause by cause.

A ``Component`` is one cause with its standard uncertainty; an ``Input`` is a value with its
components. The same records feed the GUM budget and the Monte Carlo run, so the two can only
differ by method. One physical cause that reaches two inputs (the barometer, in both absolute
pressures) is written in both with the same ``source``: it is then one error, not two.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import hypot, inf, isfinite, sqrt

from engine.measurement.given import MOST, number, shown, size, size_fault
from engine.steam.errors import Fault, InputError

DISTRIBUTIONS = ("normal", "rectangular", "triangular", "t")
SAMPLING = "sampling"  # the group kept apart: results are shown with and without it


@dataclass(frozen=True)
class Component:
    """One cause of doubt in one quantity.

    Attributes:
        name: the cause in words, unique within its input
        u: standard uncertainty, in the unit of the quantity; zero or more
        distribution: one of ``DISTRIBUTIONS``; "t" draws ``u`` times Student's t with ``dof``
        dof: degrees of freedom of ``u`` itself; infinite for limits taken as certain
        source: label of a cause shared with other inputs; empty when it is this input's alone
        group: what would be replaced to improve it (an instrument), or ``SAMPLING``
        sign: -1 when a shared cause acts against its direction in the other inputs
    """

    name: str
    u: float
    distribution: str = "normal"
    dof: float = inf
    source: str = ""
    group: str = ""
    sign: int = 1

    def __post_init__(self):
        unusable = size_fault(f"standard uncertainty of '{self.name}'", self.u)
        faults = [unusable] if unusable else []
        if not number(self.dof) > 0:
            faults.append(Fault(f"degrees of freedom of '{self.name}'", shown(self.dof), "", "a number above 0",
                                hint="a single reading has none: give its uncertainty from the instrument instead"))
        if not isinstance(self.distribution, str) or self.distribution not in DISTRIBUTIONS:
            faults.append(Fault(f"distribution of '{self.name}'", shown(self.distribution), "",
                                "one of: " + ", ".join(DISTRIBUTIONS)))
        if number(self.sign) not in (1.0, -1.0):
            faults.append(Fault(f"sign of '{self.name}'", shown(self.sign), "", "1 or -1"))
        if faults:
            raise InputError(*faults)
        object.__setattr__(self, "u", float(self.u))
        object.__setattr__(self, "dof", float(self.dof))


@dataclass(frozen=True)
class Input:
    """A quantity that enters the result: ``name`` is the model's argument, ``value`` its estimate."""

    name: str
    value: float
    components: tuple[Component, ...] = ()

    def __post_init__(self):
        object.__setattr__(self, "components", tuple(self.components))
        faults = []
        if not abs(number(self.value)) <= MOST:
            faults.append(Fault(f"value of '{self.name}'", shown(self.value), "", "a finite number"))
        names = [c.name for c in self.components]
        faults += [Fault(f"component of '{self.name}'", name, "", "a name used once",
                         why="two causes of one name would be taken for one",
                         hint="name them apart, or add them first if they are one cause")
                   for name in sorted({n for n in names if names.count(n) > 1})]
        if faults:
            raise InputError(*faults)
        object.__setattr__(self, "value", float(self.value))

    @property
    def u(self) -> float:
        """Combined standard uncertainty of this input alone."""
        shared: dict[str, float] = {}
        for c in self.components:
            key = c.source or "\0" + c.name
            shared[key] = shared.get(key, 0.0) + c.sign * c.u
        return hypot(*shared.values())


def normal(name: str, u: float, *, dof: float = inf, **labels) -> Component:
    """A standard uncertainty, as it is. ``labels``: ``source``, ``group``, ``sign`` of ``Component``."""
    return Component(name, u, "normal", dof, **labels)


def expanded(name: str, U: float, k: float = 2.0, *, dof: float = inf, **labels) -> Component:
    """An expanded uncertainty ``U`` with its coverage factor ``k``, as certificates give it (GUM 4.3.3).

    >>> expanded("certificate", 0.06, k=2.0).u
    0.03
    """
    U, factor = size(f"expanded uncertainty of '{name}'", U), number(k)
    if not (0 < factor < inf and isfinite(U / factor)):
        raise InputError(Fault(f"coverage factor of '{name}'", shown(k), "", "a number above 0"))
    return Component(name, U / factor, "normal", dof, **labels)


def rectangular(name: str, half_width: float, *, dof: float = inf, **labels) -> Component:
    """Limits ± ``half_width`` with nothing known between them: u = a/√3 (GUM 4.3.7).

    >>> round(rectangular("class A", 0.35).u, 4)
    0.2021
    """
    return Component(name, size(f"half-width of '{name}'", half_width) / sqrt(3), "rectangular", dof, **labels)


def triangular(name: str, half_width: float, *, dof: float = inf, **labels) -> Component:
    """Limits ± ``half_width``, values near the middle likelier: u = a/√6 (GUM 4.3.9)."""
    return Component(name, size(f"half-width of '{name}'", half_width) / sqrt(6), "triangular", dof, **labels)


def type_a(name: str, s: float, n: int, n_eff: float | None = None, **labels) -> Component:
    """The mean of ``n`` readings with standard deviation ``s``, worth ``n_eff`` independent ones.

    For independent readings this is s/√n with n - 1 degrees of freedom (GUM 4.2.3). Readings that
    follow one another scatter less than their true spread, by the factor (1 - 1/n_eff) in s²; this
    is put back, so that u² = s² (n - 1)/(n (n_eff - 1)), which is s²/n again when n_eff = n. Readings
    worth fewer than two independent ones are taken as two: the mean is then about as doubtful as a
    single reading, with one degree of freedom.

    >>> round(type_a("scatter", 1.489, 20).u, 3)  # JCGM 100, 4.4.3
    0.333
    >>> round(type_a("scatter", 1.489, 20, n_eff=5).u, 3)
    0.726
    """
    n_eff = n if n_eff is None else n_eff
    s = size(f"standard deviation of '{name}'", s)
    if not 2 <= number(n) < inf:
        raise InputError(Fault(f"number of readings of '{name}'", shown(n), "", "2 or more",
                               why="one reading says nothing about its own scatter",
                               hint="take more readings, or give the scatter known from elsewhere with 'normal'"))
    if not 1 <= number(n_eff) <= n:
        raise InputError(Fault(f"number of independent readings of '{name}'", shown(n_eff), "",
                               f"1 to {n}, the readings"))
    n, n_eff = number(n), max(number(n_eff), 2.0)
    return Component(name, s * sqrt((n - 1) / n / (n_eff - 1)), "t", n_eff - 1, **labels)
