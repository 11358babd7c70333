"""The measured discharge: reading a record, with a receipt of how it was understood."""

from hydroyield.record.joining import read_records
from hydroyield.record.options import RecordOptions
from hydroyield.record.reading import read_record
from hydroyield.record.result import Dropped, Receipt, Record

__all__ = ["Dropped", "Receipt", "Record", "RecordOptions", "read_record", "read_records"]
