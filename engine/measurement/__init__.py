"""From readings to a quality with its uncertainty: instruments, budget, conformity, the log."""

from engine.measurement.budget import (
    Budget,
    BudgetRow,
    Improvement,
    coverage_factor,
    decimals_of,
    numerical_tolerance,
    result_correlation,
    uncertainty_budget,
)
from engine.measurement.conformity import (
    RULES,
    Limits,
    Outcome,
    Rule,
    Verdict,
    Verdicts,
    conformance_probability,
    decide,
    decide_both,
)
from engine.measurement.independence import Independence, effective_number
from engine.measurement.inputs import SAMPLING, Component, Input, expanded, normal, rectangular, triangular, type_a
from engine.measurement.instruments import (
    KINDS,
    Instrument,
    certificate,
    cold_junction,
    gauge_temperature,
    resolution,
    scale_reading,
    stability,
)
from engine.measurement.montecarlo import Comparison, Difference, MonteCarlo, compare, monte_carlo
from engine.measurement.outliers import Outliers, flag_outliers, grubbs_critical, thompson_tau
from engine.measurement.sources import correlations_from_matrix
from engine.measurement.steadiness import Reason, SteadyLimits, Trend, Unsettled, trend
from engine.measurement.tolerances import pt100_resistance, pt100_tolerance, thermocouple_tolerance
from engine.measurement.windows import Interval, Judgement, SettledWindows, judge_window, settled_windows

__all__ = ["KINDS", "RULES", "SAMPLING", "Budget", "BudgetRow", "Comparison", "Component", "Difference",
           "Improvement", "Independence", "Input", "Instrument", "Interval", "Judgement", "Limits", "MonteCarlo",
           "Outcome", "Outliers", "Reason", "Rule", "SettledWindows", "SteadyLimits", "Trend", "Unsettled",
           "Verdict", "Verdicts", "certificate", "cold_junction", "compare", "conformance_probability",
           "correlations_from_matrix", "coverage_factor", "decide", "decide_both", "decimals_of",
           "effective_number", "expanded", "flag_outliers", "gauge_temperature", "grubbs_critical",
           "judge_window", "monte_carlo", "normal", "numerical_tolerance", "pt100_resistance",
           "pt100_tolerance", "rectangular", "resolution", "result_correlation", "scale_reading",
           "settled_windows", "stability", "thermocouple_tolerance", "thompson_tau", "trend", "triangular",
           "type_a", "uncertainty_budget"]
