"""A notebook that re-runs the saved case beside it."""

from __future__ import annotations

import hashlib
import json

__all__ = ["notebook_bytes"]


def notebook_bytes(title: str, kind: str) -> bytes:
    """Return a small notebook: load the case, analyse it, show the answer.

    >>> b"case.toml" in notebook_bytes("Run 12", "wall shear")
    True
    """
    import nbformat

    heading = title.replace("\n", " ")
    what = "analyse the wall shear of" if kind == "wall shear" else "analyse the pump line of"
    cells = [
        nbformat.v4.new_markdown_cell(
            f"# {_plain_markdown(heading)}\n\nRun the cells to {what} the case in `case.toml`, which lies beside this notebook."
        ),
        nbformat.v4.new_code_cell('import pulsekit as pk\n\ncase = pk.load_case("case.toml")\nanswer = pk.analyse(case)'),
        nbformat.v4.new_code_cell("for finding in answer.findings:\n    print(finding.name, finding.value, finding.low, finding.high)"),
        nbformat.v4.new_code_cell("answer"),
    ]
    for number, cell in enumerate(cells):
        cell["id"] = hashlib.sha256(f"{number}{cell['source']}".encode()).hexdigest()[:8]
    book = nbformat.v4.new_notebook(
        cells=cells,
        metadata={"kernelspec": {"name": "python3", "display_name": "Python 3", "language": "python"}, "language_info": {"name": "python"}},
    )
    nbformat.validate(book)
    return (json.dumps(book, indent=1, ensure_ascii=False, sort_keys=True) + "\n").encode()


def _plain_markdown(text: str) -> str:
    """Text from a user's file inside Markdown: nothing of it is markup."""
    return "".join(f"&#{ord(character)};" if character in "<>&`*_[]()#!\\|$~" else character for character in text)
