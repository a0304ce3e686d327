"""Findings: what is wrong with a sheet, said once, at the cause."""

from loadpath.findings.model import Finding, Remark, Severity, ordered
from loadpath.findings.registry import SLUGS, finding

__all__ = ["SLUGS", "Finding", "Remark", "Severity", "finding", "ordered"]
