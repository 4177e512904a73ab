"""What came back, against the plan."""

from fieldplan.returns.field import read_field_return
from fieldplan.returns.form import field_return_blank
from fieldplan.returns.matches import matches_csv, propose_matches, read_matches
from fieldplan.returns.reconcile import reconcile
from fieldplan.returns.several import Received, reconcile_all

__all__ = [
    "Received",
    "field_return_blank",
    "matches_csv",
    "propose_matches",
    "read_field_return",
    "read_matches",
    "reconcile",
    "reconcile_all",
]
