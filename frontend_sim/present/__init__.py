"""Tables, plots and pages, made from finished results."""

from frontend_sim.present.figure_file import check_plot_target
from frontend_sim.present.inspection_plot import inspection_figure, plot_inspection
from frontend_sim.present.inspection_table import inspection_tables
from frontend_sim.present.numbers import engineering
from frontend_sim.present.run_plot import plot_run, run_figure
from frontend_sim.present.run_table import run_summary, run_table, run_tables

__all__ = [
    "check_plot_target",
    "engineering",
    "inspection_figure",
    "inspection_tables",
    "plot_inspection",
    "plot_run",
    "run_figure",
    "run_summary",
    "run_table",
    "run_tables",
]
