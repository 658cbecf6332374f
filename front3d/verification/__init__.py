"""Known answers that the tool must give: cases, their runs, and the record of both."""

from front3d.verification.case import Case, Row
from front3d.verification.cases import CASES
from front3d.verification.running import verify

__all__ = ["CASES", "Case", "Row", "verify"]
