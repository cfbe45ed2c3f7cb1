"""From an answer to what people share: a page, tables, pictures, a notebook."""

from ..case.answer import set_outlet
from .outlet import answer_files, show, write

__all__ = ["answer_files", "show", "write"]

set_outlet("write", write)
set_outlet("show", show)
