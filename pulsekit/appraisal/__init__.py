"""What a Finding and a Check are; how uncertainty propagates through any calculation."""

from .finding import Check, Checks, Finding, Findings

__all__ = ["Check", "Checks", "Finding", "Findings"]
