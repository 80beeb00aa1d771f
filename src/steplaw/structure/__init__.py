"""What the structure of the code fixes: forms of laws that counts can prove."""

from steplaw.structure.forms import Forms
from steplaw.structure.premises import Plan, plan_for

__all__ = ["Forms", "Plan", "plan_for"]
