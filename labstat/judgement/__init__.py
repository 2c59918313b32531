"""What the evidence says: findings, cautions and the proposal, from rules in tables."""

from labstat.judgement.judge import judge
from labstat.judgement.model import Caution, Finding, Judgement

__all__ = ["Caution", "Finding", "Judgement", "judge"]
