"""What changed between runs, and why."""

from frontend_sim.comparison.attribution import Attribution, Share, attribute
from frontend_sim.comparison.changes import Change, changes
from frontend_sim.comparison.columns import ColumnDifference
from frontend_sim.comparison.records import RecordComparison, compare_records
from frontend_sim.comparison.reseeded import over_seeds
from frontend_sim.comparison.results import ResultDifference
from frontend_sim.comparison.scans import compare_runs, compare_scans
from frontend_sim.comparison.series import SeriesDifference
from frontend_sim.comparison.set_attribution import attribute_sets
from frontend_sim.comparison.sets import SetComparison, compare_sets
from frontend_sim.comparison.tolerance import Tolerances, parse_tolerances

__all__ = [
    "Attribution",
    "Change",
    "ColumnDifference",
    "RecordComparison",
    "ResultDifference",
    "SeriesDifference",
    "SetComparison",
    "Share",
    "Tolerances",
    "attribute",
    "attribute_sets",
    "changes",
    "compare_records",
    "compare_runs",
    "compare_scans",
    "compare_sets",
    "over_seeds",
    "parse_tolerances",
]
