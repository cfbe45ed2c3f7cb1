"""A notebook that re-runs the saved case beside it."""

from __future__ import annotations

import hashlib
import json
from typing import Any

__all__ = ["notebook_bytes"]


def notebook_bytes(title: str, kind: str) -> bytes:
    """Return a small notebook: load the case, analyse it, show the answer.

    >>> b"case.toml" in notebook_bytes("Run 12", "wall shear")
    True
    """
    heading = title.replace("\n", " ")
    what = "analyse the wall shear of" if kind == "wall shear" else "analyse the pump line of"
    sources = [
        ("markdown", f"# {_plain_markdown(heading)}\n\nRun the cells to {what} the case in `case.toml`, which lies beside this notebook."),
        ("code", 'import pulsekit as pk\n\ncase = pk.load_case("case.toml")\nanswer = pk.analyse(case)'),
        ("code", "for finding in answer.findings:\n    print(finding.name, finding.value, finding.low, finding.high)"),
        ("code", "answer"),
    ]
    book = {
        "cells": [_cell(number, *source) for number, source in enumerate(sources)],
        "metadata": {
            "kernelspec": {"name": "python3", "display_name": "Python 3", "language": "python"}, "language_info": {"name": "python"},
        },
        "nbformat": 4,
        "nbformat_minor": 5,
    }  # fmt: skip
    return (json.dumps(book, indent=1, ensure_ascii=False, sort_keys=True) + "\n").encode()


def _cell(number: int, kind: str, source: str) -> dict[str, Any]:
    """One cell; its id is made of its text, so that the same answer gives the same bytes."""
    cell: dict[str, Any] = {"cell_type": kind, "metadata": {}, "source": source}
    cell["id"] = hashlib.sha256(f"{number}{source}".encode()).hexdigest()[:8]
    if kind == "code":
        cell |= {"execution_count": None, "outputs": []}
    return cell


def _plain_markdown(text: str) -> str:
    """Text from a user's file inside Markdown: nothing of it is markup."""
    return "".join(f"&#{ord(character)};" if character in "<>&`*_[]()#!\\|$~" else character for character in text)
