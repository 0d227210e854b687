"""What a scan does to its channels: skew, crosstalk, and the order with the least of it."""

from frontend_sim.measure.scan.crosstalk import Crosstalk, crosstalk
from frontend_sim.measure.scan.inspection import ScanInspection, inspect_scan
from frontend_sim.measure.scan.order import OrderFound, best_order
from frontend_sim.measure.scan.report import ScanReport, scan_report, scan_results
from frontend_sim.measure.scan.skew import Skew, skews

__all__ = [
    "Crosstalk",
    "OrderFound",
    "ScanInspection",
    "ScanReport",
    "Skew",
    "best_order",
    "crosstalk",
    "inspect_scan",
    "scan_report",
    "scan_results",
    "skews",
]
