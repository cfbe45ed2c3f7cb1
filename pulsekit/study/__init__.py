"""Many cases: one process, all cores, or a cluster."""

from .givens import read_givens
from .run import StudyResult, run_study

__all__ = ["StudyResult", "read_givens", "run_study"]
