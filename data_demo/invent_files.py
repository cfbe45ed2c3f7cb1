"""Writing the demo files: plain text with a head that says that the data are invented, and the truth beside them as JSON."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np

LABEL = "INVENTED DATA, made by data_demo/make_demo_data.py: no person and no machine was recorded."


def write_text(path: Path, text: str, *, encoding: str = "utf-8") -> None:
    """Write with LF line ends on every system."""
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(text.encode(encoding))


def table(columns: list[tuple[np.ndarray, str]], *, delimiter: str = ",", decimal: str = ".") -> str:
    """Rows of numbers, each column with its own printf form."""
    rows = zip(*(values for values, _ in columns), strict=True)
    lines = (delimiter.join(form % value for value, (_, form) in zip(row, columns, strict=True)) for row in rows)
    text = "\n".join(lines) + "\n"
    return text if decimal == "." else text.replace(".", decimal)


def write_truth(path: Path, truth: dict[str, Any]) -> None:
    """JSON with ten significant digits, complex numbers as [real, imaginary]; the last bits differ between machines and carry nothing."""
    write_text(path, json.dumps({"about": LABEL, **_plain(truth)}, indent=1, ensure_ascii=False) + "\n")


def _plain(value: Any) -> Any:
    if isinstance(value, dict):
        return {key: _plain(entry) for key, entry in value.items()}
    if isinstance(value, (list, tuple, np.ndarray)):
        return [_plain(entry) for entry in value]
    if isinstance(value, (complex, np.complexfloating)):
        return [_short(value.real), _short(value.imag)]
    if isinstance(value, (float, np.floating)):
        return _short(float(value))
    return int(value) if isinstance(value, np.integer) else value


def _short(value: float) -> float:
    # What is a rounding error of zero is written as zero.
    return float(f"{value:.10g}") if abs(value) > 1e-25 else 0.0
