"""Where commands speak: answers to one stream, reasons and progress to another, files written whole."""

from __future__ import annotations

import json
import os
from pathlib import Path
from typing import Any, TextIO

from engine.steam.errors import Fault, InputError

ANSWERED, OPEN, UNUSABLE = 0, 1, 2  # exit statuses


class Console:
    """Two streams; progress only where the second is a terminal."""

    def __init__(self, out: TextIO, err: TextIO):
        self._out, self._err = out, err
        self._shown = -1

    def say(self, text: str) -> None:
        self._out.write(text + "\n")

    def warn(self, text: str) -> None:
        self._end_progress()
        self._err.write(text + "\n")

    def progress(self, what: str, done: float) -> None:
        """Called often; a line is rewritten when a per cent has been gained."""
        percent = int(100 * done)
        if self._err.isatty() and percent != self._shown:
            self._shown = percent
            self._err.write(f"\r{what} {percent} %")
            self._err.flush()
            if percent >= 100:
                self._end_progress()

    def _end_progress(self) -> None:
        if self._shown >= 0:
            self._err.write("\r" + " " * 60 + "\r")
            self._shown = -1

    def write(self, path: Path, text: str) -> None:
        """Write a file, or with the path - to the first stream. A file that fails half-way leaves none behind."""
        if str(path) == "-":
            self._out.write(text)
            return
        with self.whole_file(path) as half:
            half.write_text(text, encoding="utf-8")

    def whole_file(self, path: Path) -> _Whole:
        return _Whole(path)


class _Whole:
    """A file written beside its place and moved there when it is complete."""

    def __init__(self, path: Path):
        self._path, self._half = path, path.with_name(f".{path.name}.part")

    def __enter__(self) -> Path:
        return self._half

    def __exit__(self, kind, error, trace) -> None:
        if isinstance(error, OSError):
            raise InputError(Fault("output file", str(self._path), "", "a place that can be written to",
                                   error.strerror or str(error), "check the folder and its permissions")) from error
        if kind is None:
            try:
                os.replace(self._half, self._path)
            except OSError as failed:
                raise InputError(Fault("output file", str(self._path), "", "a place that can be written to",
                                       failed.strerror or str(failed), "check the folder")) from failed
        else:
            self._half.unlink(missing_ok=True)


def as_text(figures: Any) -> str:
    """Figures as JSON text."""
    return json.dumps(figures, ensure_ascii=False, indent=1, allow_nan=False) + "\n"
