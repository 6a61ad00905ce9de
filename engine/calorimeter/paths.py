"""What happens to the sample between line and exhaust: process paths, point by point.

Two limiting processes. Behind a throttle in a wide exhaust the enthalpy stays: the isenthalpic
path. In one constant bore the steam must speed up as it expands, and h + (G v)²/2 stays, with
the mass flux G: the constant-bore path (Fanno line without friction length on it). It cannot pass
its point of greatest entropy; there it chokes.

Cases broadcast together; a path adds one axis at the end, its points from line to exhaust.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import cache

import numpy as np

from engine.calorimeter.checks import door, refuse
from engine.calorimeter.roots import bracketed_root
from engine.steam import P_TRIPLE, T_MAX, if97
from engine.steam.arrays import give_back, refuse_outside
from engine.steam.errors import Fault, InputError
from engine.steam.saturation import saturated_kernel
from engine.steam.states import LAST_STEP, search_T_ph
from engine.steam.status import SteamStatus

POINTS = 33
P_PEAK = 3.078376e6  # Pa, where the enthalpy of saturated vapour is greatest: 2803.3 kJ/kg
ROUNDING = 1e-12  # relative: a quality or an enthalpy so little off saturation is on it
_ASIDE = 0.382  # share of the way (in log p) of the point that dry-out does not need: never one of an even grid


@dataclass(frozen=True)
class Path:
    """States along a process from line to exhaust, shape (cases..., points) each.

    ``status`` is WET or SUPERHEATED at every point. ``p_dry`` is the pressure where the sample
    leaves the dome [Pa], NaN where it does not on this path; ``p_choke`` the pressure where a
    constant-bore path ends early because it chokes, NaN where it does not; one value per case.
    """

    p: np.ndarray
    T: np.ndarray
    x: np.ndarray
    h: np.ndarray
    s: np.ndarray
    v: np.ndarray
    velocity: np.ndarray
    status: np.ndarray
    p_dry: float | np.ndarray
    p_choke: float | np.ndarray
    mass_flux: float | np.ndarray

    @property
    def dries_out(self):
        """Whether the path crosses from wet to superheated steam."""
        return ~np.isnan(self.p_dry)

    @property
    def chokes(self):
        """Whether the path ends above the exhaust pressure."""
        return ~np.isnan(self.p_choke)

    def row(self, k: int) -> Path:
        """The path of one of several cases."""
        return Path(*(getattr(self, field.name)[k] for field in fields(self)))


def _dry_enthalpy(p: np.ndarray) -> np.ndarray:
    """h_g [J/kg] over 1-d pressures."""
    return if97.enthalpy_2(p, if97.saturation_T(p))


@cache
def _rising_vapour() -> tuple[float, np.ndarray, np.ndarray]:
    """Greatest h_g, and log p over sqrt(greatest - h_g) from there down to the triple pressure.

    h_g is a parabola about its greatest value, so log p is nearly straight over that root.
    """
    log_p = np.linspace(np.log(P_PEAK), np.log(P_TRIPLE), 160)
    h_g = _dry_enthalpy(np.exp(log_p))
    return h_g[0], np.sqrt(h_g[0] - h_g), log_p


def dry_out_pressure(h: np.ndarray, p_high: np.ndarray) -> np.ndarray:
    """Pressure below ``p_high`` at which wet steam of enthalpy ``h`` becomes dry as the pressure falls.

    1-d arrays [J/kg], [Pa]. It lies below 30.8 bar, where the enthalpy of saturated vapour rises with
    pressure; ``p_high`` itself for steam that is just dry there. NaN where there is none: for steam still
    wet at the triple pressure, and for steam superheated all the way.
    """
    h_peak, root, log_p = _rising_vapour()
    # the table brackets the answer closely; the equations then settle it
    near = np.interp(np.sqrt(np.maximum(h_peak - h, 0.0)), root, log_p)
    p = np.exp(bracketed_root(lambda log_p: _dry_enthalpy(np.exp(log_p)) - h, near - 0.0005, near + 0.0005))
    top = np.minimum(p_high, P_PEAK)
    above = h / _dry_enthalpy(top) - 1.0
    p = np.where(np.abs(above) <= ROUNDING, top, np.minimum(p, top))
    return np.where((above > ROUNDING) | (near <= log_p[-1]), np.nan, p)


def _grid(p_line, p_end, points: int) -> np.ndarray:
    """Pressures from line to end, evenly spaced in log p."""
    p = p_line[:, None] * (p_end / p_line)[:, None] ** np.linspace(0.0, 1.0, points)
    p[:, -1] = p_end
    return p


def _states(p: np.ndarray, x: np.ndarray, sat: tuple, T: np.ndarray, hot: np.ndarray):
    """T, x, h, s, v, status from qualities where wet and temperatures where hot (all 1-d)."""
    h, s, v = (sat[k] + x * (sat[k + 1] - sat[k]) for k in (1, 3, 5))
    T = np.where(hot, T, sat[0])
    if hot.any():
        h[hot], s[hot], v[hot] = if97.vapour_hsv(p[hot], T[hot])
    return T, np.where(hot, 1.0, x), h, s, v, np.where(hot, SteamStatus.SUPERHEATED, SteamStatus.WET)


def _isenthalpic(p: np.ndarray, h: np.ndarray):
    """States at enthalpy ``h`` over 1-d pressures; paths side by side share most of theirs."""
    distinct, where = np.unique(p, return_inverse=True)
    sat = tuple(column[where] for column in saturated_kernel(distinct))
    x = (h - sat[1]) / (sat[2] - sat[1])
    hot, T = x > 1.0 + ROUNDING, sat[0].copy()
    if hot.any():
        T[hot] = search_T_ph(p[hot], h[hot], T[hot])
    return _states(p, np.minimum(x, 1.0), sat, T, hot)


def _line(p_line: np.ndarray, x: np.ndarray):
    """h and v of wet steam over 1-d line pressures."""
    sat = saturated_kernel(p_line)
    return sat[1] + x * (sat[2] - sat[1]), sat[5] + x * (sat[6] - sat[5])


def _shaped(named: dict, points: int) -> tuple[tuple[int, ...], list[np.ndarray]]:
    if not (isinstance(points, int | np.integer) and 5 <= points <= 100_000):
        raise InputError(Fault("points", repr(points), "", "a whole number from 5 to 100 000", name="points"))
    refuse(named)
    return next(iter(named.values())).shape, [np.ascontiguousarray(a).ravel() for a in named.values()]


def isenthalpic_path(p_line, x, p_exhaust, *, points: int = POINTS) -> Path:
    """Throttling from (p_line, x) to p_exhaust at constant enthalpy.

    Pressures [Pa, absolute], quality 0..1, any shapes. The path meets the saturation line exactly
    where it dries out; velocities on it are 0. Raises InputError for any input out of range.

    >>> path = isenthalpic_path(10e5, 0.98, 1e5)
    >>> round(path.p_dry / 1e5, 3), float(round(path.T[-1] - 273.15, 1)), SteamStatus(path.status[-1]).name
    (3.894, 130.1, 'SUPERHEATED')
    """
    named, scalar = door(p_line=p_line, x=x, p_exhaust=p_exhaust)
    shape, (p_line, x, p_exhaust) = _shaped(named, points)
    h, _ = _line(p_line, x)
    return _isenthalpic_path(shape, scalar, p_line, h, p_exhaust, points)


def isenthalpic_path_at(p_line, h_line, p_exhaust, *, points: int = POINTS) -> Path:
    """As ``isenthalpic_path``, from the specific enthalpy in the line [J/kg]: the line may be superheated.

    >>> path = isenthalpic_path_at(10e5, 2.80e6, 1e5)
    >>> float(round(path.T[0] - 273.15, 1)), bool(path.dries_out)
    (188.6, False)
    """
    named, scalar = door(p_line=p_line, h_line=h_line, p_exhaust=p_exhaust)
    shape, (p_line, h, p_exhaust) = _shaped(named, points)
    T = if97.saturation_T(p_line)
    steam = (h >= if97.enthalpy_1(p_line, T) * (1 - ROUNDING)) & (h <= if97.enthalpy_2(p_line, np.full(T.shape, T_MAX)))
    if faults := refuse_outside("h_line", named["h_line"], steam.reshape(shape), "that of wet or superheated steam",
                                why=f"the path starts between saturated water and vapour of {T_MAX} K",
                                hint="check the unit, and the line pressure"):
        raise InputError(*faults)
    return _isenthalpic_path(shape, scalar, p_line, h, p_exhaust, points)


def _isenthalpic_path(shape, scalar, p_line, h, p_exhaust, points) -> Path:
    p_dry = dry_out_pressure(h, p_line)
    p_dry = np.where(p_dry >= p_exhaust, p_dry, np.nan)
    extra = _extra(p_dry, p_line, p_exhaust)
    p = -np.sort(-np.column_stack([_grid(p_line, p_exhaust, points - 1), extra]), axis=1)
    columns = _isenthalpic(p.ravel(), np.repeat(h, points))
    nan, none = np.full(h.shape, np.nan), np.zeros(h.shape)
    return _path(shape, points, scalar, p, columns, np.zeros(p.shape), p_dry, nan, none)


def _extra(p_dry, p_line, p_end):
    """The point that every path has beside its even grid: where it dries out, if that is on the way."""
    on_the_way = (p_dry < p_line * (1 - 1e-9)) & (p_dry > p_end * (1 + 1e-9))
    return np.where(on_the_way, p_dry, p_line * (p_end / p_line) ** _ASIDE)


def _path(shape, points, scalar, p, columns, velocity, p_dry, p_choke, mass_flux) -> Path:
    full = (*shape, points)
    T, x, h, s, v, status = (c.reshape(full) for c in columns)
    per_case = (give_back(a.reshape(shape), scalar) for a in (p_dry, p_choke, mass_flux))
    return Path(p.reshape(full), T, x, h, s, v, velocity.reshape(full), status.astype(np.int8), *per_case)


def _constant_bore(p: np.ndarray, h0: np.ndarray, G: np.ndarray):
    """States with h + (G v)²/2 = h0 over 1-d pressures."""
    sat = saturated_kernel(p)
    _, h_f, h_g, _, _, v_f, v_g = sat
    k = 0.5 * G * G
    v_fg, h_fg = v_g - v_f, h_g - h_f
    # wet: a quadratic in x, in the form that stays exact for small G
    b, c = 2 * k * v_f * v_fg + h_fg, k * v_f * v_f + h_f - h0
    x = -2 * c / (b + np.sqrt(np.maximum(b * b - 4 * k * v_fg * v_fg * c, 0.0)))
    hot, T = x > 1.0 + ROUNDING, sat[0].copy()
    if hot.any():
        T[hot] = _search_constant_bore(p[hot], h0[hot], k[hot], T[hot])
    return _states(p, np.minimum(x, 1.0), sat, T, hot)


def _search_constant_bore(p, h0, k, T):
    """Newton search for the vapour temperature with h + k v² = h0, upwards from saturation."""
    T = T.copy()
    for _ in range(60):
        h, v, cp, v_T = if97.vapour_h_v_slopes(p, T)
        step = (h0 - h - k * v * v) / (cp + 2 * k * v * v_T)
        T = np.minimum(T + step, T_MAX)
        if not (np.abs(step) > LAST_STEP).any():
            break
    return T


def _vertex(y: np.ndarray, middle: np.ndarray) -> np.ndarray:
    """Where a parabola through each row's ``middle`` point and its neighbours is greatest, in steps from it."""
    rows = np.arange(len(y))
    a, b, c = (y[rows, middle + k] for k in (-1, 0, 1))
    curve = a - 2 * b + c
    return np.where(curve < 0, 0.5 * (a - c) / np.where(curve < 0, curve, 1.0), np.inf)


def _may_choke(s: np.ndarray) -> np.ndarray:
    """Rows of entropy along a path that seem to pass their greatest value before the end."""
    last = s.shape[1] - 1
    return (s.argmax(axis=1) < last) | (_vertex(s, np.full(len(s), last - 1)) < 1.0)


def _choking_pressure(p_line, p_exhaust, h0, G) -> np.ndarray:
    """Pressure of greatest entropy between line and exhaust; NaN where entropy still rises at the exhaust."""
    upper, lower, end = np.log(p_line), np.log(p_exhaust), np.log(p_exhaust)
    rows, share = np.arange(upper.size), np.linspace(0.0, 1.0, 21)
    for _ in range(3):
        log_p = upper[:, None] + (lower - upper)[:, None] * share
        s = _constant_bore(np.exp(log_p).ravel(), np.repeat(h0, 21), np.repeat(G, 21))[3].reshape(-1, 21)
        middle = np.clip(s.argmax(axis=1), 1, 19)
        upper, lower = log_p[rows, middle - 1], log_p[rows, middle + 1]
    vertex = log_p[rows, middle] + np.clip(_vertex(s, middle), -1.0, 1.0) * 0.5 * (lower - upper)
    return np.where(vertex > end + 1e-9, np.exp(np.minimum(vertex, np.log(p_line))), np.nan)


def constant_bore_path(p_line, x, p_exhaust, line_velocity, *, points: int = POINTS) -> Path:
    """Expansion in one constant bore from (p_line, x) at ``line_velocity`` [m/s] towards p_exhaust.

    The mass flux G = c1/v1 and h + (G v)²/2 stay, so the sample speeds up about as its volume grows.
    Where it chokes the path ends at ``p_choke``, above the exhaust pressure, and ``chokes`` says so.
    Pressures [Pa, absolute], any shapes. Raises InputError for any input out of range.

    >>> path = constant_bore_path(10e5, 0.98, 1e5, 20.0)
    >>> float(round(path.velocity[-1], 1)), bool(path.chokes)
    (188.9, False)
    """
    named, scalar = door(p_line=p_line, x=x, p_exhaust=p_exhaust, line_velocity=line_velocity)
    shape, (p_line, x, p_exhaust, c) = _shaped(named, points)
    h, v = _line(p_line, x)
    G, h0 = c / v, h + 0.5 * c * c
    p, p_end, p_choke = _grid(p_line, p_exhaust, points - 1), p_exhaust, np.full(h.shape, np.nan)
    columns = _constant_bore(p.ravel(), np.repeat(h0, points - 1), np.repeat(G, points - 1))
    if _may_choke(columns[3].reshape(p.shape)).any():
        p_choke = _choking_pressure(p_line, p_exhaust, h0, G)
        p_choke = np.minimum(p_choke, p_line * (1 - 1e-9))  # a path has a length, even where the line is choked
        p_end = np.where(np.isnan(p_choke), p_exhaust, p_choke)
        p = _grid(p_line, p_end, points - 1)
        columns = _constant_bore(p.ravel(), np.repeat(h0, points - 1), np.repeat(G, points - 1))
    p_dry = _constant_bore_dry_out(p, columns[5].reshape(p.shape) == SteamStatus.WET, h0, G)
    extra = _extra(p_dry, p_line, p_end)
    one_more = _dry_saturated(extra) if (extra == p_dry).all() else _constant_bore(extra, h0, G)
    p, columns = _insert(p, columns, extra, one_more)
    return _path(shape, points, scalar, p, columns, np.repeat(G, points) * columns[4], p_dry, p_choke, G)


def _constant_bore_dry_out(p: np.ndarray, wet: np.ndarray, h0: np.ndarray, G: np.ndarray) -> np.ndarray:
    """Pressure where each row of a path, wet at the line, first meets saturation; NaN where it never does."""
    p_dry, rows = np.full(len(p), np.nan), np.flatnonzero(wet[:, 0] & ~wet.all(axis=1))
    if rows.size:
        first_hot = np.argmax(~wet[rows], axis=1)
        h0, k = h0[rows], 0.5 * G[rows] ** 2

        def excess(log_p):
            q = np.exp(log_p)
            h, _, v = if97.vapour_hsv(q, if97.saturation_T(q))
            return h + k * v * v - h0

        log_p = bracketed_root(excess, np.log(p[rows, first_hot]), np.log(p[rows, first_hot - 1]), 1e-8)
        p_dry[rows] = np.minimum(np.exp(log_p), p[rows, 0])
    return p_dry


def _dry_saturated(p: np.ndarray):
    """States of dry saturated steam over 1-d pressures."""
    T = if97.saturation_T(p)
    return T, np.ones(p.shape), *if97.vapour_hsv(p, T), np.full(p.shape, SteamStatus.WET)


def _insert(p: np.ndarray, columns: tuple, extra_p: np.ndarray, extra: tuple):
    """One more point in every row, in its place by falling pressure."""
    whole = np.column_stack([p, extra_p])
    order = np.argsort(-whole, axis=1, kind="stable")

    def placed(old, new):
        return np.take_along_axis(np.column_stack([old.reshape(p.shape), new]), order, axis=1)

    return placed(p, extra_p), tuple(placed(a, b).ravel() for a, b in zip(columns, extra, strict=True))
