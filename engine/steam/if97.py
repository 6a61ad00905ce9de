"""IAPWS-IF97 regions 1, 2 and 4 as plain array kernels: no range checks, no shapes, no errors.

Each region's dimensionless Gibbs energy is a double power sum. Over a block of points the powers
of both variables stand in two small tables; one matrix product with the coefficients and one
weighted sum then give every derivative asked for. That costs ten or so NumPy calls whatever the
number of terms, so a single state is cheap and a million are limited by arithmetic alone.

Callers check ranges and phase first. The kernels are smooth a little beyond the regions' edges,
which the iterations above them rely on.
"""

from __future__ import annotations

import threading
from collections.abc import Sequence

import numpy as np

from engine.steam import if97_tables as tab

# Derivatives of the Gibbs energy, as (order in pi, order in tau)
G, G_P, G_T, G_PP, G_PT, G_TT = (0, 0), (1, 0), (0, 1), (2, 0), (1, 1), (0, 2)


# Columns of one matrix product. Larger ones are shared out over threads by the linear-algebra library,
# whose waiting costs more than these small products take.
_PRODUCT = 512
_FEW = 64  # points up to which one slow pow() call is quicker than many fast products


class _Scratch(threading.local):
    """Per-thread work space that grows to the largest block seen: no page is asked for twice."""

    def __init__(self):
        self.rooms: dict[str, np.ndarray] = {}

    def room(self, name: str, rows: int, columns: int) -> np.ndarray:
        store = self.rooms.get(name)
        if store is None or store.size < rows * columns:
            store = self.rooms[name] = np.empty(rows * columns)
        return store[:rows * columns].reshape(rows, columns)


_scratch = _Scratch()


class Powers:
    """base**e for a fixed set of exponents >= 0, each the product of two others already there."""

    def __init__(self, wanted: Sequence[int]):
        self.exponents = [0, 1]
        self._factors: list[tuple[int, int]] = []
        for exponent in sorted(wanted):
            self._reach(int(exponent))
        self._column = np.array(self.exponents)[:, None]

    def _reach(self, exponent: int) -> None:
        if exponent in self.exponents:
            return
        pair = next((a for a in self.exponents if exponent - a in self.exponents), None)
        if pair is None:  # go by way of an exponent that nobody asked for
            self._reach(exponent // 2)
            pair = exponent // 2
            self._reach(exponent - pair)
        self._factors.append((self.exponents.index(pair), self.exponents.index(exponent - pair)))
        self.exponents.append(exponent)

    def __call__(self, base: np.ndarray, rows: np.ndarray) -> None:
        """Fill row k with base**exponents[k]: pow() for a few points, one product a row for many."""
        if base.size <= _FEW:
            np.power(base, self._column, out=rows)
            return
        rows[0], rows[1] = 1.0, base
        for k, (i, j) in enumerate(self._factors, start=2):
            np.multiply(rows[i], rows[j], out=rows[k])


class PowerSum:
    """sum n * a**I * b**J and its derivatives over 1-d arrays a and b."""

    def __init__(self, table: np.ndarray):
        I, J, n = table[:, 0].astype(int), table[:, 1].astype(int), table[:, 2]  # noqa: E741 (the release's letters)
        self.of_a, self.of_b, self.of_inverse_b = Powers(I), Powers(J[J >= 0]), Powers(-J[J < 0])
        self.below = len(self.of_inverse_b.exponents) if (J < 0).any() else 0
        self.I = np.array(self.of_a.exponents)
        self.J = np.array([-e for e in self.of_inverse_b.exponents[:self.below]] + self.of_b.exponents)
        self.coefficients = np.zeros((self.I.size, self.J.size))
        rows, columns = self.I.tolist(), self.J.tolist()
        for i, j, coefficient in zip(I, J, n, strict=True):
            self.coefficients[rows.index(i), columns.index(j)] = coefficient
        self._matrices: dict[tuple[int, int], np.ndarray] = {}
        self._stacks: dict[tuple, np.ndarray] = {}

    def _matrix(self, order: tuple[int, int]) -> np.ndarray:
        """Coefficients times the factors that a derivative brings down."""
        if order not in self._matrices:
            factor_I = np.prod([self.I - k for k in range(order[0])], axis=0) if order[0] else np.ones(self.I.size)
            factor_J = np.prod([self.J - k for k in range(order[1])], axis=0) if order[1] else np.ones(self.J.size)
            self._matrices[order] = self.coefficients * factor_I[:, None] * factor_J
        return self._matrices[order]

    def __call__(self, a: np.ndarray, b: np.ndarray, wanted: tuple[tuple[int, int], ...]) -> list[np.ndarray]:
        n = a.size
        of_a, of_b = _scratch.room("of_a", self.I.size, n), _scratch.room("of_b", self.J.size, n)
        self.of_a(a, of_a)
        if self.below:
            self.of_inverse_b(1.0 / b, of_b[:self.below])
        self.of_b(b, of_b[self.below:])
        sums = self._few(of_a, of_b, wanted) if n <= _FEW else self._many(of_a, of_b, wanted)
        # the factors of a derivative are in the matrices; what is left is the exponent it lowers
        for k, (i, j) in enumerate(wanted):
            for _ in range(i):
                sums[k] /= a
            for _ in range(j):
                sums[k] /= b
        return sums

    def _few(self, of_a, of_b, wanted) -> list[np.ndarray]:
        """All derivatives in one product: the fewest calls."""
        if wanted not in self._stacks:
            self._stacks[wanted] = np.concatenate([self._matrix(order) for order in wanted])
        slabs = (self._stacks[wanted] @ of_b).reshape(len(wanted), self.I.size, -1)
        slabs *= of_a
        return list(slabs.sum(axis=1))

    def _many(self, of_a, of_b, wanted) -> list[np.ndarray]:
        """One derivative after the other, in one work space: the least memory traffic."""
        n = of_a.shape[1]
        slab, sums = _scratch.room("slab", self.I.size, n), []
        for order in wanted:
            matrix = self._matrix(order)
            for start in range(0, n, _PRODUCT):
                part = slice(start, start + _PRODUCT)
                np.matmul(matrix, of_b[:, part], out=slab[:, part])
            np.multiply(slab, of_a, out=slab)
            sums.append(slab.sum(axis=0))
        return sums


_REGION_1 = PowerSum(tab.REGION_1)
_REGION_2 = PowerSum(tab.REGION_2_RESIDUAL)


# Ideal-gas part of region 2: exponents from the lowest up, without gaps, and coefficients per order of derivative
_IDEAL_J, _IDEAL_n = tab.REGION_2_IDEAL[np.argsort(tab.REGION_2_IDEAL[:, 0])].T
_IDEAL_2 = (_IDEAL_n, _IDEAL_n * _IDEAL_J, _IDEAL_n * _IDEAL_J * (_IDEAL_J - 1))


def _ideal(tau: np.ndarray, order: int) -> np.ndarray:
    """Ideal-gas part of region 2 without ln pi, derived ``order`` times: pow() for a few points, Horner for many."""
    coefficients = _IDEAL_2[order]
    if tau.size <= _FEW:
        return coefficients @ tau ** (_IDEAL_J - order)[:, None]
    total = np.full(tau.shape, coefficients[-1])
    for coefficient in coefficients[-2::-1]:
        total *= tau
        total += coefficient
    per_tau = 1.0 / tau
    for _ in range(int(order - _IDEAL_J[0])):
        total *= per_tau
    return total


def gibbs_1(p: np.ndarray, T: np.ndarray, wanted: Sequence[tuple[int, int]]) -> list[np.ndarray]:
    """Region 1 (liquid), eq. (7): derivatives of g/(RT) with respect to pi and tau, 1-d arrays."""
    a, b = tab.PI_SHIFT_1 - p / tab.P_STAR_1, tab.T_STAR_1 / T - tab.TAU_SHIFT_1
    results = _REGION_1(a, b, tuple(wanted))
    return [-r if order[0] == 1 else r for r, order in zip(results, wanted, strict=True)]  # d/dpi = -d/da


def gibbs_2(p: np.ndarray, T: np.ndarray, wanted: Sequence[tuple[int, int]]) -> list[np.ndarray]:
    """Region 2 (vapour), eqs. (15) to (17): derivatives of g/(RT), 1-d arrays."""
    wanted = tuple(wanted)
    pi, tau = p / tab.P_STAR_2, tab.T_STAR_2 / T
    results = _REGION_2(pi, tau - tab.TAU_SHIFT_2, wanted)
    pressure_part = {G: np.log, G_P: lambda z: 1.0 / z, G_PP: lambda z: -1.0 / (z * z)}
    for k, order in enumerate(wanted):
        if order[0] == 0:
            results[k] += _ideal(tau, order[1])
        if order in pressure_part:
            results[k] += pressure_part[order](pi)
    return results


def _h(g_t, T, T_star):
    return tab.R * T_star * g_t  # R T tau g_tau, and T tau = T*


def enthalpy_1(p, T):
    """h [J/kg] of liquid."""
    return _h(gibbs_1(p, T, (G_T,))[0], T, tab.T_STAR_1)


def enthalpy_2(p, T):
    """h [J/kg] of vapour."""
    return _h(gibbs_2(p, T, (G_T,))[0], T, tab.T_STAR_2)


def _hsv(gibbs, p, T, p_star, T_star):
    g, g_p, g_t = gibbs(p, T, (G, G_P, G_T))
    return _h(g_t, T, T_star), tab.R * (T_star / T * g_t - g), tab.R * T / p_star * g_p


def liquid_hsv(p, T):
    """h [J/kg], s [J/(kg K)], v [m³/kg] of liquid (region 1)."""
    return _hsv(gibbs_1, p, T, tab.P_STAR_1, tab.T_STAR_1)


def vapour_hsv(p, T):
    """h [J/kg], s [J/(kg K)], v [m³/kg] of vapour (region 2)."""
    return _hsv(gibbs_2, p, T, tab.P_STAR_2, tab.T_STAR_2)


def _all_properties(gibbs, p, T, p_star, T_star):
    g, g_p, g_t, g_pp, g_pt, g_tt = gibbs(p, T, (G, G_P, G_T, G_PP, G_PT, G_TT))
    tau = T_star / T
    cp = -tab.R * tau * tau * g_tt
    # Table 3: w² = R T g_p² / ((g_p - tau g_pt)² / (tau² g_tt) - g_pp)
    w = np.sqrt(tab.R * T * g_p**2 / ((g_p - tau * g_pt) ** 2 / (tau * tau * g_tt) - g_pp))
    return _h(g_t, T, T_star), tab.R * (tau * g_t - g), tab.R * T / p_star * g_p, cp, w


def liquid_properties(p, T):
    """h, s, v, cp [J/(kg K)] and sound speed [m/s] of liquid (region 1)."""
    return _all_properties(gibbs_1, p, T, tab.P_STAR_1, tab.T_STAR_1)


def vapour_properties(p, T):
    """h, s, v, cp [J/(kg K)] and sound speed [m/s] of vapour (region 2)."""
    return _all_properties(gibbs_2, p, T, tab.P_STAR_2, tab.T_STAR_2)


def vapour_h_cp(p, T):
    """h and cp of vapour: what a search for T at given h needs."""
    g_t, g_tt = gibbs_2(p, T, (G_T, G_TT))
    return _h(g_t, T, tab.T_STAR_2), -tab.R * (tab.T_STAR_2 / T) ** 2 * g_tt


def vapour_s_cp(p, T):
    """s and cp of vapour: what a search for T at given s needs."""
    g, g_t, g_tt = gibbs_2(p, T, (G, G_T, G_TT))
    tau = tab.T_STAR_2 / T
    return tab.R * (tau * g_t - g), -tab.R * tau * tau * g_tt


def vapour_h_v_slopes(p, T):
    """h, v, (dh/dT)_p = cp and (dv/dT)_p of vapour: what a search along a constant-bore path needs."""
    g_p, g_t, g_pt, g_tt = gibbs_2(p, T, (G_P, G_T, G_PT, G_TT))
    tau = tab.T_STAR_2 / T
    return (_h(g_t, T, tab.T_STAR_2), tab.R * T / tab.P_STAR_2 * g_p, -tab.R * tau * tau * g_tt,
            tab.R / tab.P_STAR_2 * (g_p - tau * g_pt))


def saturation_p(T):
    """Saturation pressure [Pa], eq. (30)."""
    n1, n2, n3, n4, n5, n6, n7, n8, n9, n10 = tab.SATURATION
    theta = T + n9 / (T - n10)
    A, B, C = (theta + n1) * theta + n2, (n3 * theta + n4) * theta + n5, (n6 * theta + n7) * theta + n8
    ratio = 2 * C / (np.sqrt(B * B - 4 * A * C) - B)
    return 1e6 * (ratio * ratio) ** 2


def saturation_T(p):
    """Saturation temperature [K], eq. (31)."""
    n1, n2, n3, n4, n5, n6, n7, n8, n9, n10 = tab.SATURATION
    beta = np.sqrt(np.sqrt(p * 1e-6))
    E, F, G_ = (beta + n3) * beta + n6, (n1 * beta + n4) * beta + n7, (n2 * beta + n5) * beta + n8
    D = 2 * G_ / (-F - np.sqrt(F * F - 4 * E * G_)) + n10
    return 0.5 * (D - np.sqrt(D * D - 4 * (n9 + n10 * (D - n10))))
