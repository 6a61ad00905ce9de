"""What happens to the sample between line and exhaust: process paths, point by point.

Two limiting processes. Behind a throttle in a wide exhaust the enthalpy stays: the isenthalpic
path. In one constant bore the steam must speed up as it expands, and h + (G v)²/2 stays, with
the mass flux G: the constant-bore path (Fanno line without friction length on it). It cannot pass
its point of greatest entropy; there it chokes.

Cases broadcast together; a path adds one axis at the end, its points from line to exhaust.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter.checks import door, refuse
from engine.calorimeter.roots import bracketed_root
from engine.steam import T_MAX, if97
from engine.steam.arrays import give_back
from engine.steam.errors import Fault, InputError
from engine.steam.saturation import dome, saturated_kernel
from engine.steam.states import LAST_STEP, search_T_ph
from engine.steam.status import SteamStatus

POINTS = 33


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


def dry_out_pressure(h: np.ndarray, p_high: np.ndarray) -> np.ndarray:
    """Highest pressure up to ``p_high`` at which steam of enthalpy ``h`` is dry saturated.

    1-d arrays [J/kg], [Pa]. Searched below 30.8 bar, up to where the enthalpy of saturated vapour
    rises with pressure. NaN where it is still wet at the triple pressure; the lower of ``p_high`` and
    30.8 bar where it is dry already.
    """
    table = dome()
    rising = slice(int(table.h_g.argmax()) + 1)
    # the diagram's own table brackets the answer closely; the equations then settle it
    near = np.interp(h, table.h_g[rising], np.log(table.p[rising]))
    high = np.log(np.minimum(p_high, table.p[rising][-1]))

    def excess(log_p):
        p = np.exp(log_p)
        return if97.enthalpy_2(p, if97.saturation_T(p)) - h

    p = np.exp(np.minimum(bracketed_root(excess, near - 0.002, near + 0.002), high))
    return np.where(h < table.h_g[0], np.nan, p)


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
    """States at enthalpy ``h`` over 1-d pressures."""
    sat = saturated_kernel(p)
    x = (h - sat[1]) / (sat[2] - sat[1])
    hot, T = x > 1.0 + 1e-12, sat[0].copy()
    if hot.any():
        T[hot] = search_T_ph(p[hot], h[hot], T[hot])
    return _states(p, np.minimum(x, 1.0), sat, T, hot)


def _line(p_line: np.ndarray, x: np.ndarray):
    """h and v of wet steam over 1-d line pressures."""
    sat = saturated_kernel(p_line)
    return sat[1] + x * (sat[2] - sat[1]), sat[5] + x * (sat[6] - sat[5])


def _shaped(named: dict, points: int) -> tuple[tuple[int, ...], list[np.ndarray]]:
    if not (isinstance(points, int) and 5 <= points <= 100_000):
        raise InputError(Fault("points", points, "", "a whole number from 5 to 100 000", name="points"))
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
    return _isenthalpic_path(shape, scalar, p_line, h, p_exhaust, points)


def _isenthalpic_path(shape, scalar, p_line, h, p_exhaust, points) -> Path:
    p_dry = dry_out_pressure(h, p_line)
    inside = (p_dry < p_line) & (p_dry >= p_exhaust)
    extra = np.where(inside, p_dry, np.sqrt(p_line * p_exhaust))
    p = -np.sort(-np.column_stack([_grid(p_line, p_exhaust, points - 1), extra]), axis=1)
    columns = _isenthalpic(p.ravel(), np.repeat(h, points))
    starts_wet = columns[5].reshape(p.shape)[:, 0] == SteamStatus.WET
    return _path(shape, points, scalar, p, columns, np.zeros(p.shape), np.where(inside & starts_wet, p_dry, np.nan),
                 np.full(h.shape, np.nan), np.zeros(h.shape))


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
    hot, T = x > 1.0 + 1e-12, sat[0].copy()
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
        p_end = np.where(np.isnan(p_choke), p_exhaust, np.minimum(p_choke, p_line * (1 - 1e-9)))
        p = _grid(p_line, p_end, points - 1)
        columns = _constant_bore(p.ravel(), np.repeat(h0, points - 1), np.repeat(G, points - 1))
    p_dry = _constant_bore_dry_out(p, columns[5].reshape(p.shape) == SteamStatus.WET, h0, G)
    extra = np.where(np.isnan(p_dry), np.sqrt(p_line * p_end), p_dry)
    p, columns = _insert(p, columns, extra, _constant_bore(extra, h0, G))
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


def _insert(p: np.ndarray, columns: tuple, extra_p: np.ndarray, extra: tuple):
    """One more point in every row, in its place by falling pressure."""
    whole = np.column_stack([p, extra_p])
    order = np.argsort(-whole, axis=1, kind="stable")

    def placed(old, new):
        return np.take_along_axis(np.column_stack([old.reshape(p.shape), new]), order, axis=1)

    return placed(p, extra_p), tuple(placed(a, b).ravel() for a, b in zip(columns, extra, strict=True))
