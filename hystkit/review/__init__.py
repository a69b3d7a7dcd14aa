"""The verdict that needs several results: findings with margin, severity and what to change."""

from hystkit.review.finding import Finding, Review
from hystkit.review.review import review

__all__ = ["Finding", "Review", "review"]
