"""HDF5 out and in: what a run gave, kept whole, and run again from itself."""

from frontend_sim.archive.opening import open_record, open_single_record
from frontend_sim.archive.record import Record
from frontend_sim.archive.repeat import rerun, rerun_scenario
from frontend_sim.archive.save import record_run, save_record
from frontend_sim.archive.scan_record import ChannelRecord, ScanRecord
from frontend_sim.measure.result import Result, Verdict

__all__ = [
    "ChannelRecord",
    "Record",
    "Result",
    "ScanRecord",
    "Verdict",
    "open_record",
    "open_single_record",
    "record_run",
    "rerun",
    "rerun_scenario",
    "save_record",
]
