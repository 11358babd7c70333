"""What every rule for the environmental flow and every form of a level keeps to."""

from __future__ import annotations

import json
from itertools import pairwise, product
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import hydroyield
from hydroyield.river import WaterRules
from hydroyield.river.presets import PRESETS
from hydroyield.site import read_site_text
from hydroyield.site.assembly import levels, water_rules
from hydroyield.site.head_models import Headwater, RiverLevel
from hydroyield.site.models import SiteFile
from hydroyield.site.river_models import PRESET_NAMES, RULES

RECORD = np.geomspace(0.2, 40, 400)  # m3/s, whose statistics the rules use
RIVER = np.linspace(0, 50, 1001)

SITE: dict[str, Any] = {
    "format": 1,
    "site": {"name": "Larkbeck Weir"},
    "discharge": {"duration_table": [[5, 30], [50, 6], [95, 0.8]]},
    "head": {"headwater": {"level": 101.2}, "tailwater": {"level": 97.9}},
    "turbines": [{"count": 1, "type": "kaplan", "rated_discharge": 6.2, "rated_head": 2.8}],
}


def read(**blocks: Any) -> SiteFile:
    return read_site_text(json.dumps(SITE | blocks)).model


# --- rules ----------------------------------------------------------------------------------------

WRITTEN: dict[str, dict[str, Any]] = {
    **{name: dict(rule.example) for name, rule in RULES.items() if name != "preset"},
    **{name: {"rule": "preset", "name": name} for name in PRESET_NAMES},
}
LARGER: dict[str, dict[str, Any]] = {  # the same rules, each keeping more
    "constant": {"discharge": "0.9 m3/s"},
    "monthly": {"discharge": [0.8] * 12},
    "exceedance": {"percent": 80},
    "mean_share": {"share": "15 %"},
    "inflow_share": {"share": "60 %", "above": "1.5 m3/s"},
    "steps": {"steps": [[0, 0.5], [2, 0.9]]},
}
rules = pytest.mark.parametrize("name", WRITTEN)


def of(*written: dict[str, Any], **blocks: Any) -> WaterRules:
    return water_rules(read(environmental_flow=list(written), **blocks), RECORD)


def kept_in(found: WaterRules, month: int) -> np.ndarray:
    return found.environmental_flow(RIVER, np.full(RIVER.size, found.season_of_month[month - 1]))


def test_every_rule_is_looked_at() -> None:
    assert set(PRESET_NAMES) == set(PRESETS)
    assert {rule["rule"] for rule in WRITTEN.values()} == set(RULES)
    assert {*LARGER, "preset"} == set(RULES)


@rules
def test_a_rule_keeps_something_and_never_more_than_the_inflow(name: str) -> None:
    found = of(WRITTEN[name])
    for month in range(1, 13):
        kept = kept_in(found, month)
        assert kept.shape == RIVER.shape
        assert (kept >= 0).all()
        assert (kept <= RIVER).all()
        assert kept[-1] > 0


@rules
def test_what_is_kept_never_falls_with_the_inflow(name: str) -> None:
    for month in range(1, 13):
        assert (np.diff(kept_in(of(WRITTEN[name]), month)) >= -1e-12).all()


@rules
def test_offered_water_is_what_is_left(name: str) -> None:
    found = of(WRITTEN[name])
    season = np.full(RIVER.size, found.season_of_month[6])
    balance = found.offered(RIVER, season) + kept_in(found, 7)
    np.testing.assert_allclose(balance, RIVER, atol=1e-12)


@rules
def test_a_rule_holds_in_its_months_alone(name: str) -> None:
    found, always = of(WRITTEN[name] | {"months": [3, 4]}), of(WRITTEN[name])
    np.testing.assert_allclose(kept_in(found, 3), kept_in(always, 3))
    assert (kept_in(found, 5) == 0).all()


@pytest.mark.parametrize("name", LARGER)
def test_a_larger_rule_keeps_more(name: str) -> None:
    less, more = of(WRITTEN[name]), of(WRITTEN[name] | LARGER[name])
    assert (kept_in(more, 8) >= kept_in(less, 8)).all()
    assert (kept_in(more, 8) > kept_in(less, 8)).any()


@pytest.mark.parametrize(("first", "second"), list(pairwise(WRITTEN)))
def test_together_two_rules_keep_at_least_each_and_at_most_their_sum(
    first: str, second: str
) -> None:
    both = [WRITTEN[first], WRITTEN[second]]
    each = [kept_in(of(rule), 6) for rule in both]
    largest = kept_in(of(*both), 6)
    added = kept_in(of(*both, environmental_flow_combination="sum"), 6)
    ordered = kept_in(of(*both, environmental_flow_combination="priority"), 6)
    np.testing.assert_allclose(largest, np.maximum(*each), atol=1e-12)
    np.testing.assert_allclose(added, np.minimum(RIVER, each[0] + each[1]), atol=1e-12)
    np.testing.assert_allclose(ordered, each[0], atol=1e-12)


# --- levels ---------------------------------------------------------------------------------------

HEADWATERS: dict[str, dict[str, Any]] = {
    "level": {"level": 101.2},
    "table": {"table": [[0, 101.0], [20, 101.2], [50, 101.4]]},
    "gates": {"table": [[0, 101.2], [40, 101.2]]},
    "weir": {"weir": {"crest": 100.9, "length": 22, "coefficient": 1.8}},
    "drowned": {"weir": {"crest": 100.9, "length": 22, "coefficient": 1.8, "drowned": True}},
}
RIVERS: dict[str, dict[str, Any]] = {
    "level": {"level": 97.9},
    "table": {"table": [[0, 97.9], [20, 98.35], [100, 99.8]]},
    "rating": {"rating": {"zero_level": 97.6, "coefficient": 18, "exponent": 1.7}},
    "channel": {"channel": {
        "bed_level": 97.2, "bottom_width": 9, "side_slope": 1.5, "slope": 0.002,
        "manning_n": 0.035}},
    "gaugings": {"gaugings": [[2, 98.0], [8, 98.4], [20, 98.9]]},
}  # fmt: skip
TAILWATERS = {
    **RIVERS,
    **{f"{name}, a tailrace": form | {"follows": "turbine"} for name, form in RIVERS.items()},
    **{
        f"{name}, drowned": form | {"follows": "higher", "river": RIVERS["table"]}
        for name, form in RIVERS.items()
    },
    **{f"{name}, held up": form | {"not_below": 98.2} for name, form in RIVERS.items()},
}
USUAL = {  # every form once, and each of the other keys; all pairs if slow
    *zip(RIVERS, HEADWATERS, strict=True),
    ("rating, a tailrace", "weir"),
    ("channel, drowned", "level"),
    ("table, held up", "gates"),
}
pairs = pytest.mark.parametrize(
    ("tailwater", "headwater"),
    [
        pytest.param(*pair, marks=() if pair in USUAL else pytest.mark.slow)
        for pair in product(TAILWATERS, HEADWATERS)
    ],
)


def heads(headwater: str, tailwater: str) -> dict[str, Any]:
    return {"headwater": HEADWATERS[headwater], "tailwater": TAILWATERS[tailwater]}


def test_every_form_is_looked_at() -> None:
    assert {key for form in HEADWATERS.values() for key in form} == set(Headwater.exactly_one_of)
    assert {key for form in RIVERS.values() for key in form} == set(RiverLevel.exactly_one_of)


@pairs
def test_levels_rise_with_the_river_and_bound_the_head(headwater: str, tailwater: str) -> None:
    found = levels(read(head=heads(headwater, tailwater)))
    nothing = np.zeros(RIVER.size)
    state = found.at(RIVER, nothing, nothing)
    standing = state.headwater(nothing), state.tailwater(nothing)
    for level in standing:
        assert level.shape == RIVER.shape
        assert np.isfinite(level).all()
        assert (np.diff(level) >= -1e-9).all()
    np.testing.assert_allclose(
        state.gross(nothing), np.maximum(0, standing[0] - standing[1]), atol=1e-12
    )
    taken = 0.5 * RIVER  # water that is turbined leaves the weir, and fills a tailrace
    assert (state.headwater(taken) <= standing[0] + 1e-9).all()
    assert (state.tailwater(taken) >= standing[1] - 1e-9).all()
    assert (state.net(taken) <= state.gross(taken)).all()


@pairs
def test_a_plant_runs_on_every_form_and_gains_by_a_higher_headwater(
    headwater: str, tailwater: str, tmp_path: Path
) -> None:
    found = {}
    for rise in (0.0, 0.1):
        head = json.loads(json.dumps(heads(headwater, tailwater)))
        form = head["headwater"]
        if "level" in form:
            form["level"] += rise
        elif "table" in form:
            form["table"] = [[q, z + rise] for q, z in form["table"]]
        else:
            form["weir"]["crest"] += rise
        path = tmp_path / "site.yaml"
        path.write_text(json.dumps(SITE | {"head": head}))
        estimate = found[rise] = hydroyield.estimate(hydroyield.read_site(path))
        run = estimate.operation
        assert (run.net_head <= run.gross_head + 1e-9).all()
        assert (run.output <= estimate.scheme.plant.installed_capacity * (1 + 1e-9)).all()
        (_, gross), *losses, (_, net) = estimate.ledger_mwh
        assert net == pytest.approx(gross + sum(mwh for _, mwh in losses), abs=1e-12 * gross)
    assert found[0.1].mean_annual_energy_mwh > found[0.0].mean_annual_energy_mwh > 0
