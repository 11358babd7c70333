"""A site file of one option: the user's own text, with another plant in it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import yaml

from hydroyield.quantities import W_PER_KW
from hydroyield.site.plant_models import EfficiencyTable, TurbineGroup

_PLAIN_KEYS = ("minimum_discharge", "starting_discharge", "jets", "axis_level")


def turbines_text(turbines: Sequence[TurbineGroup]) -> str:
    """The block `turbines:` of a site file, every number at full precision."""
    lines = ["turbines:"]
    for group in turbines:
        entries = [f"{key}: {_in_line(value)}" for key, value in _written(group).items()]
        lines += [f"  - {entries[0]}", *(f"    {entry}" for entry in entries[1:])]
    return "\n".join(lines) + "\n"


def _in_line(value: Any) -> str:
    """A value of YAML in one line."""
    text: str = yaml.safe_dump(value, default_flow_style=True, width=100_000, allow_unicode=True)
    return text.removesuffix("...\n").strip()


def _written(group: TurbineGroup) -> dict[str, Any]:
    """A turbine group as plain data in the units that the reference page states."""
    written: dict[str, Any] = {
        "count": group.count,
        "type": group.type,
        "rated_discharge": group.rated_discharge,  # m3/s
    }
    for key in _PLAIN_KEYS:
        if getattr(group, key) is not None:
            written[key] = getattr(group, key)
    curve = group.efficiency
    if isinstance(curve, EfficiencyTable):
        written["efficiency"] = _listed(curve.model_dump(exclude_none=True))
    elif curve is not None:
        written["efficiency"] = _listed(curve)
    if group.output_limit is not None:
        written["output_limit"] = [[head, watt / W_PER_KW] for head, watt in group.output_limit]
    if group.waterway:
        written["waterway"] = [
            _listed(loss.model_dump(exclude_none=True)) for loss in group.waterway
        ]
    if group.source is not None:
        written["source"] = group.source
    return written


def _listed(value: Any) -> Any:
    """Tuples as lists, all the way down."""
    if isinstance(value, dict):
        return {key: _listed(inner) for key, inner in value.items()}
    return [_listed(inner) for inner in value] if isinstance(value, list | tuple) else value


def site_text_with(text: str, turbines: str, pipe_diameter: float | None) -> str:
    """The text of a site file with another plant, without its options.

    text : of the site file
    turbines : the block, from `turbines_text`
    pipe_diameter : of the one pipe of the waterway [m]; None to keep it

    All else stays as the user wrote it, comments too; only a file in braces is written anew.
    """
    root: Any = yaml.compose(text, Loader=yaml.SafeLoader)
    if root.flow_style:
        return _rewritten(text, turbines, pipe_diameter)
    changes = [(*_span(text, root, "turbines"), turbines)]
    if any(key.value == "options" for key, _ in root.value):
        changes.append((*_span(text, root, "options"), ""))
    if pipe_diameter is not None:
        node = _diameter(root)
        changes.append((node.start_mark.index, node.end_mark.index, f"{pipe_diameter!r}"))
    for start, end, new in sorted(changes, reverse=True):
        text = text[:start] + new + text[end:]
    return text


def _rewritten(text: str, turbines: str, pipe_diameter: float | None) -> str:
    """The same from its content alone; every scalar stays the text that it was."""
    content = yaml.load(text, Loader=yaml.BaseLoader)
    content.pop("options", None)
    content |= yaml.safe_load(turbines)
    for loss in content.get("waterway", []) if pipe_diameter is not None else []:
        if "pipe" in loss:
            loss["pipe"]["diameter"] = pipe_diameter
    return yaml.safe_dump(content, sort_keys=False, allow_unicode=True)


def _span(text: str, root: Any, name: str) -> tuple[int, int]:
    """First and last place of the lines of a key of the top level, with its value.

    A block ends where the next token begins; comments and blank lines above that token stay.
    """
    key, value = next(pair for pair in root.value if pair[0].value == name)
    start, end = key.start_mark.index, value.end_mark.index
    if value.end_mark.column:  # a value in one line: the rest of the line goes with it
        line_end = text.find("\n", end)
        return start, len(text) if line_end < 0 else line_end + 1
    lines = text[start:end].split("\n")[:-1]
    while not lines[-1].strip() or lines[-1].startswith("#"):
        lines.pop()
    return start, start + len("\n".join(lines)) + 1


def _diameter(root: Any) -> Any:
    """The scalar under waterway[].pipe.diameter."""
    pipes = (_value(loss, "pipe") for loss in _value(root, "waterway").value)
    return _value(next(pipe for pipe in pipes if pipe is not None), "diameter")


def _value(node: Any, name: str) -> Any:
    return next((value for key, value in node.value if key.value == name), None)
