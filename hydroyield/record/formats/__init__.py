"""Discharge records as gauging agencies deliver them: one small module for each."""

from hydroyield.record.formats.registry import PLAIN, Format, format_of_text

__all__ = ["PLAIN", "Format", "format_of_text"]
