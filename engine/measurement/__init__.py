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
from engine.measurement.logbook import Log, absolute, fit_mapping, propose_mapping, read_log
from engine.measurement.logbook.mapping import Column, Mapping, Question
from engine.measurement.logbook.propose import Proposal
from engine.measurement.logbook.rows import Rejected, Remark
from engine.measurement.logbook.suspicion import Suspicion
from engine.measurement.logbook.write import write_log
from engine.measurement.montecarlo import Comparison, Difference, MonteCarlo, compare, monte_carlo
from engine.measurement.outliers import Outliers, flag_outliers, grubbs_critical, thompson_tau
from engine.measurement.sources import correlations_from_matrix
from engine.measurement.steadiness import Reason, SteadyLimits, Trend, Unsettled, trend
from engine.measurement.tolerances import pt100_resistance, pt100_tolerance, thermocouple_tolerance
from engine.measurement.windows import Interval, Judgement, SettledWindows, judge_window, settled_windows

__all__ = ["KINDS", "RULES", "SAMPLING", "Budget", "BudgetRow", "Column", "Comparison", "Component", "Difference",
           "Improvement", "Independence", "Input", "Instrument", "Interval", "Judgement", "Limits", "Log", "Mapping",
           "MonteCarlo", "Outcome", "Outliers", "Proposal", "Question", "Reason", "Rejected", "Remark", "Rule",
           "SettledWindows", "SteadyLimits", "Suspicion", "Trend", "Unsettled", "Verdict", "Verdicts", "absolute",
           "certificate", "cold_junction", "compare", "conformance_probability", "correlations_from_matrix",
           "coverage_factor", "decide", "decide_both", "decimals_of", "effective_number", "expanded", "fit_mapping",
           "flag_outliers", "gauge_temperature", "grubbs_critical", "judge_window", "monte_carlo", "normal",
           "numerical_tolerance", "propose_mapping", "pt100_resistance", "pt100_tolerance", "read_log", "rectangular",
           "resolution", "result_correlation", "scale_reading", "settled_windows", "stability",
           "thermocouple_tolerance", "thompson_tau", "trend", "triangular", "type_a", "uncertainty_budget",
           "write_log"]
