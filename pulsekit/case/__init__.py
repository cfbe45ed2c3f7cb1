"""The question as one value, and the one way from question to answer."""

from .case import Case, PumpLineCase, WallShearCase
from .files import case_from_toml, load_case

__all__ = ["Case", "PumpLineCase", "WallShearCase", "case_from_toml", "load_case"]
