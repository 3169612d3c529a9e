"""The records of a run: HDF5 in netCDF-4 style, written safely and read back as plain arrays."""

from groundroll.records.layout import QUANTITIES, ReceiverLine, SnapshotFrame
from groundroll.records.reading import Records, open_records
from groundroll.records.writing import RecordsWriter

__all__ = ["QUANTITIES", "ReceiverLine", "Records", "RecordsWriter", "SnapshotFrame", "open_records"]
