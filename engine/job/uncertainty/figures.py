"""Figures in the digits that their uncertainty allows."""

from __future__ import annotations

from engine.measurement import Budget, decimals_of


def figures(budget: Budget) -> tuple[str, str]:
    """Quality and expanded uncertainty in the digits that the uncertainty allows: two of its own.

    Six decimals at most: no thermometer tells more.
    """
    places = max(0, min(decimals_of(budget.U), 6)) if budget.U > 0 else 6
    return f"{budget.value:.{places}f}", f"{budget.U:.{places}f}"


def wetness_figures(budget: Budget) -> str:
    """``2.80 ± 0.58``: wetness with its expanded uncertainty in percent."""
    places = max(0, min(decimals_of(100 * budget.U), 4)) if budget.U > 0 else 4
    return f"{100 * (1 - budget.value):.{places}f} ± {100 * budget.U:.{places}f}"
