"""The question as one value, and the one way from question to answer."""

from .analyse import analyse
from .answer import Answer, Band
from .case import Case, PumpLineCase, WallShearCase
from .compare import Comparison, compare
from .files import case_from_toml, load_case
from .workspace import Workspace

__all__ = ["Answer", "Band", "Case", "Comparison", "PumpLineCase", "WallShearCase", "Workspace", "analyse", "case_from_toml", "compare", "load_case"]
