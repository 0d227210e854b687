"""Tables, plots and pages, made from finished results."""

from frontend_sim.present.figure_file import check_plot_target, save_figure
from frontend_sim.present.inspection_plot import inspection_figure, plot_inspection
from frontend_sim.present.inspection_table import inspection_tables
from frontend_sim.present.map_plot import map_figure, plot_map
from frontend_sim.present.numbers import engineering
from frontend_sim.present.replay_table import replay_tables
from frontend_sim.present.run_plot import plot_run, run_figure
from frontend_sim.present.run_table import run_summary, run_table, run_tables
from frontend_sim.present.scan_inspection_plot import (
    plot_scan_inspection,
    scan_inspection_figure,
)
from frontend_sim.present.scan_plot import check_channels_drawn, plot_scan, scan_figure
from frontend_sim.present.scan_table import report_tables, scan_summary, scan_tables
from frontend_sim.present.sensitivity_plot import plot_sensitivities, sensitivity_figure
from frontend_sim.present.sensitivity_table import sensitivity_tables
from frontend_sim.present.solution_plot import plot_solution, solution_figure
from frontend_sim.present.solution_table import map_tables, solution_tables

__all__ = [
    "check_channels_drawn",
    "check_plot_target",
    "engineering",
    "inspection_figure",
    "inspection_tables",
    "map_figure",
    "map_tables",
    "plot_inspection",
    "plot_map",
    "plot_run",
    "plot_scan",
    "plot_scan_inspection",
    "plot_sensitivities",
    "plot_solution",
    "replay_tables",
    "report_tables",
    "run_figure",
    "run_summary",
    "run_table",
    "run_tables",
    "save_figure",
    "scan_figure",
    "scan_inspection_figure",
    "scan_summary",
    "scan_tables",
    "sensitivity_figure",
    "sensitivity_tables",
    "solution_figure",
    "solution_tables",
]
