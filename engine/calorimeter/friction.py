"""Viscosity of the steam, friction factor and fittings, over arrays.

The libraries behind these (``iapws`` for the viscosity, ``fluids`` for friction) answer one state
at a time. A sweep repeats few distinct states, so each distinct one is asked for once.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np
from fluids.fittings import Darby, Darby3K
from fluids.friction import friction_factor as _one_friction_factor

from engine.calorimeter.rig_inputs import admit
from engine.steam import viscosity
from engine.steam.arrays import give_back, shortened
from engine.steam.errors import Fault, InputError

MOST_FITTINGS = 1000  # of one kind
STEEL_ROUGHNESS = 46e-6  # m, new commercial steel pipe (Moody, Trans. ASME 66 (1944) 671, 0.00015 ft)

# Our name -> entry of the three-constant method (Darby, Chem. Eng. 106(7), July 1999, 101) in ``fluids``.
# No valves: an exhaust that can be shut would put line pressure on a body that may not be made for it.
FITTINGS = {
    "elbow 90°, threaded": "Elbow, 90°, threaded, standard, (r/D = 1)",
    "elbow 90°, long radius": "Elbow, 90°, threaded, long radius, (r/D = 1.5)",
    "elbow 45°, threaded": "Elbow, 45°, threaded standard, (r/D = 1)",
    "bend 180°, close": "Elbow, 180°, threaded, close-return bend, (r/D = 1)",
    "tee, turning": "Tee, Through-branch, (as elbow), threaded, (r/D = 1)",
    "tee, straight": "Tee, Run-through, threaded, (r/D = 1)",
}
_INCH = 0.0254  # m; the method's size term is written for the nominal size in inches


def over_distinct(function: Callable[..., float], *arrays: np.ndarray) -> np.ndarray:
    """``function`` of scalars over equally shaped arrays, called once for each distinct set of arguments.

    >>> over_distinct(lambda a, b: a + b, np.array([1.0, 1.0]), np.array([2.0, 2.0]))
    array([3., 3.])
    """
    rows = np.stack([np.ravel(a) for a in arrays], axis=1)
    distinct, place = np.unique(rows, axis=0, return_inverse=True)
    values = np.array([function(*row) for row in distinct.tolist()])
    return values[place.ravel()].reshape(arrays[0].shape)


def steam_viscosity(density, T):
    """Viscosity [Pa s] of steam of ``density`` [kg/m³] at ``T`` [K]: IAPWS R12-08, scalars or arrays.

    >>> steam_viscosity(1.0, 433.15) * 1e6
    14.538324
    """
    (density, T), scalar = admit(density=density, T=T)
    return give_back(over_distinct(viscosity, density, T), scalar)


def friction_factor(reynolds, relative_roughness):
    """Darcy friction factor [1]: laminar below Re = 2040, else the Colebrook equation (``fluids``).

    >>> friction_factor(1e5, 0.0)
    0.01799
    """
    (Re, roughness), scalar = admit(reynolds=reynolds, relative_roughness=relative_roughness)
    return give_back(over_distinct(_one_friction_factor, Re, roughness), scalar)


def fittings_loss(fittings: Mapping[str, int], reynolds, bore):
    """Loss coefficient K [1] of a set of fittings ``{name: number}`` in a pipe, by Darby's three constants.

    ``bore`` [m] stands for the nominal size, which the method asks for (1 % on K). The names are
    those of ``FITTINGS``; an unknown one or a negative number raises InputError. The open end is
    not a fitting here: the jet loses its energy outside, after the last pressure that counts.

    >>> fittings_loss({"elbow 90°, threaded": 2}, 3e4, 0.0266)
    1.44
    """
    if not isinstance(fittings, Mapping):
        raise InputError(Fault("fittings", shortened(fittings), "", "a number for each fitting, by name",
                               name="fittings"))
    faults = [Fault("fitting", shortened(name), "", "one of " + ", ".join(FITTINGS), name="fittings")
              for name in fittings if name not in FITTINGS]
    faults += [Fault(f"number of '{name}'", shortened(count), "", f"0 to {MOST_FITTINGS}", name="fittings")
               for name, count in fittings.items()
               if not (isinstance(count, int | float) and 0 <= count <= MOST_FITTINGS)]
    if faults:
        raise InputError(*faults)
    (Re, D), scalar = admit(reynolds=reynolds, bore=bore)
    total = np.zeros_like(Re)
    for name, count in fittings.items():
        total = total + count * _darby(FITTINGS[name], Re, D)
    return give_back(total, scalar)


def _darby(entry, Re, D):
    K1, Ki, Kd = Darby[entry]
    return Darby3K(NPS=D / _INCH, Re=Re, K1=K1, Ki=Ki, Kd=Kd)
