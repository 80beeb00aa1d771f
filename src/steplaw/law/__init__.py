"""Laws: from counts to a formula, with its leading term and its grade."""

from steplaw.law.evaluate import value
from steplaw.law.find import find_law
from steplaw.law.leading import compare_order, leading_term, order, ratio_limit
from steplaw.law.model import Grade, Law, Observation
from steplaw.law.shape import Shape

__all__ = [
    "Grade",
    "Law",
    "Observation",
    "Shape",
    "compare_order",
    "find_law",
    "leading_term",
    "order",
    "ratio_limit",
    "value",
]
