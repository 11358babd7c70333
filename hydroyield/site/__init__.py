"""The site file: its models, YAML that remembers lines, and faults in plain words."""

from hydroyield.site.reading import SiteDescription, read_site_file, read_site_text

__all__ = ["SiteDescription", "read_site_file", "read_site_text"]
