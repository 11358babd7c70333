"""What pages share: drawn figures, and the templates that lay out plain data."""

from __future__ import annotations

import base64
from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True)
class DrawnFigure:
    """A figure for the page.

    name, title : as in its `FigureSpec`
    alt : what it shows, in words with numbers
    svg : the drawing
    """

    name: str
    title: str
    alt: str
    svg: str

    @property
    def data(self) -> str:
        """The drawing as the data of an image in the page."""
        return base64.b64encode(self.svg.encode()).decode()


def rendered(template: str, data: dict[str, Any]) -> str:
    """A page as HTML, self-contained; all text of the data is escaped."""
    from jinja2 import Environment, PackageLoader, StrictUndefined

    templates = Environment(
        loader=PackageLoader("hydroyield.report", "templates"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    return templates.get_template(template).render(data)
