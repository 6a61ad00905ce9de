"""The result as data for other programs: JSON with every figure in SI, CSV with a line per run or per row."""

from __future__ import annotations

import json
import math
from typing import Any

import numpy as np

from engine import __version__
from engine.calorimeter import Status
from engine.job.result.reduction import RunResult
from engine.job.result.result import Result
from engine.job.result.said import headline, told, verdict_lines
from engine.job.uncertainty import Check
from engine.measurement import Budget, Verdict
from engine.measurement.logbook.write import write_log

FORMAT = "steam quality result"


def as_json(result: Result, check: Check | None = None) -> str:
    """The whole result as JSON text; what has no value is null."""
    return json.dumps(_plain(as_data(result, check)), ensure_ascii=False, indent=1, allow_nan=False) + "\n"


def as_data(result: Result, check: Check | None = None) -> dict[str, Any]:
    """The same as plain data."""
    said = told(result)
    data: dict[str, Any] = {
        "format": FORMAT, "program": __version__, "formulation": "IAPWS-IF97", "title": result.case["title"],
        "kind": said.word, "sentence": headline(result) if result.x is not None else said.headline,
        "final": result.final, "x": result.x, "missing": result.missing, "unable": result.unable,
        "cautions": result.cautions}
    if result.x is not None:
        data |= {"with_sampling": _budget(result.budget), "by_instruments": _budget(result.instruments),
                 "terms": [t._asdict() for t in result.terms]}
    if result.verdicts is not None:
        data["decision"] = {"sentences": verdict_lines(result), "rule": result.case["decision_rule"],
                            "limit": result.si["x_limit"], "side": result.case["limit_side"],
                            "with_sampling": _verdict(result.verdicts.with_sampling),
                            "by_instruments": _verdict(result.verdicts.without_sampling)}
    if result.repeatability is not None:
        data["repeatability"] = {k: v for k, v in result.repeatability._asdict().items() if k != "component"}
    if check is not None:
        data["monte_carlo"] = _check(check)
    data["runs"] = [_run(run) for run in result.runs]
    return data


def _budget(b: Budget) -> dict[str, Any]:
    return {"u": b.u, "U": b.U, "k": b.k, "coverage": b.coverage, "degrees_of_freedom": b.dof}


def _verdict(v: Verdict) -> dict[str, Any]:
    return {"outcome": v.outcome.value, "probability": v.probability, "chance_wrong": v.chance_wrong,
            "accept_from": v.accept_from, "accept_to": v.accept_to}


def _check(check: Check) -> dict[str, Any]:
    d = check.drawn
    return {"mean": d.value, "u": d.u, "coverage": d.coverage, "interval": d.symmetric, "shortest": d.shortest,
            "draws": d.draws, "seed": d.seed, "unreadable": d.unusable, "superheated": check.superheated,
            "agrees": check.comparison.agree, "comparison": check.comparison.sentence,
            "by_instruments": {"u": check.instruments.u, "interval": check.instruments.symmetric,
                               "agrees": check.comparison_instruments.agree}}


def _run(run: RunResult) -> dict[str, Any]:
    s = run.settling
    return {"name": run.run.name, "x": run.quality, "unable": run.unable, "cautions": run.cautions,
            "rows": len(run.run), "rows_used": int(run.used.sum()), "removed": {str(k): v for k, v in
                                                                                run.removed.items()},
            "window": {"begin": s.begin, "end": s.end, "by_hand": s.by_hand, "reason": s.reason, "settled": s.settled},
            "means_as_shown": {name: m._asdict() for name, m in run.means.items()},
            "corrected": {} if run.corrected is None else {
                name: float(value) for name, value in run.corrected._asdict().items() if value is not None},
            "corrections": [c._asdict() for c in run.corrections],
            "scatter": None if run.scatter is None else {
                "mean": run.scatter.mean, "s": run.scatter.s, "mean_without_removal": run.scatter.without,
                "n_eff": run.scatter.independence.n_eff if run.scatter.independence else None}}


def _plain(value: Any) -> Any:
    """What JSON has a word for: infinities and NaN become null."""
    if isinstance(value, dict):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [_plain(item) for item in value]
    if isinstance(value, np.generic):
        value = value.item()
    return value if not isinstance(value, float) or math.isfinite(value) else None


def run_table(result: Result) -> list[dict[str, Any]]:
    """A line per run and one for all of them, in SI, for a CSV."""
    def line(name: str, x, budget: Budget | None, used, run: RunResult | None = None) -> dict[str, Any]:
        true = run.corrected if run else None
        return {"run": name, "x": x, "U": None if budget is None else budget.U, "k": None if budget is None else
                budget.k, "readings used": used, "begin [s]": run.settling.begin if run else None,
                "end [s]": run.settling.end if run else None,
                **{f"{n} [{unit}]": None if true is None else float(getattr(true, n))
                   for n, unit in (("p_line", "Pa"), ("p_exhaust", "Pa"), ("T_exhaust", "K"))},
                "remark": run.unable if run else "; ".join(result.missing)}

    rows = [line(r.run.name, r.quality, None, int(r.used.sum()), r) for r in result.runs]
    return [*rows, line("all runs", result.x, result.budget, int(sum(r.used.sum() for r in result.read)))]


def write_rows(target, result: Result) -> None:
    """Every row of every run, corrected and reduced, as CSV; ``target`` is a path or an open file."""
    runs = [run for run in result.runs if len(run.run)]
    names = {"p_line": 0, "p_exhaust": 1, "T_exhaust": 2}
    true = [run.rows_corrected for run in runs]
    channels = {name: np.concatenate([np.broadcast_to(t[k], len(r.run)) for t, r in zip(true, runs, strict=True)])
                for name, k in names.items()} if runs else {}
    if runs:
        channels["x"] = np.concatenate([run.x for run in runs])
    timed = runs and all(run.run.time is not None for run in runs)
    texts = {"run": [run.run.name for run in runs for _ in range(len(run.run))],
             "row": [str(n) for run in runs for n in run.run.rows.tolist()],
             "counts": ["yes" if u else "" for run in runs for u in run.used.tolist()],
             "status": [_STATUS[s] for run in runs for s in run.status.tolist()]}
    write_log(target, channels, time=np.concatenate([run.run.time for run in runs]) if timed else None, texts=texts)


_STATUS = {Status.OK: "", Status.THIN_MARGIN: "thin margin", Status.NOT_SUPERHEATED: "exhaust not superheated",
           Status.LINE_SUPERHEATED: "line superheated", Status.OUT_OF_RANGE: "out of range",
           Status.MISSING: "reading missing"}
