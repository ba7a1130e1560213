"""result.json: the contract, plain numbers, no NaN."""

from __future__ import annotations

import json
import math
from dataclasses import replace

import pytest
from sample_result import sample

from supplycheck.results.json import result_json, result_record

NAMED = {
    "demand": {"flow", "pressure", "node", "sprinkler_flow", "hose_flow"},
    "supply": {"static", "residual", "test_flow", "available_pressure", "available_flow"},
    "margin": {"pressure", "required", "rule"},
    "balance": {"largest_flow_imbalance", "largest_pressure_imbalance"},
}
NODE = {"tag", "x", "y", "elevation", "pressure", "discharge", "k_factor", "required_discharge"}
PIPE = {
    "from",
    "to",
    "flow",
    "velocity",
    "bore",
    "c_factor",
    "length",
    "equivalent_length",
    "friction_loss",
    "elevation_loss",
    "device_loss",
    "roughness",
    "friction_factor",
}


def test_named_keys_are_there() -> None:
    record = json.loads(result_json(sample()))
    assert record["verdict"] == "adequate"
    assert record["units"]["flow"] == "gpm"
    assert record["units"]["pressure"] == "psi"
    assert record["schema"].endswith("/1")
    for block, keys in NAMED.items():
        assert keys <= set(record[block])
    for node in record["nodes"]:
        assert set(node) >= NODE
    for pipe in record["pipes"]:
        assert set(pipe) >= PIPE
    for finding in record["findings"]:
        assert {"check", "state", "measured", "limit", "source", "text"} <= set(finding)
    assert record["assumptions"][0]["key"] == "hose.outside_node"


def test_numbers_are_in_the_projects_units() -> None:
    """1 psi = 0.068 947 6 bar, 1 gal = 3.785 412 L, 1 ft = 0.3048 m (NIST SP 811)."""
    us, metric = result_record(sample("us")), result_record(sample("metric"))
    assert us["demand"]["pressure"] == pytest.approx(58.3, rel=1e-12)
    assert metric["demand"]["pressure"] == pytest.approx(58.3 * 0.0689476, rel=1e-6)
    assert metric["demand"]["flow"] == pytest.approx(612.4 * 3.785412, rel=1e-6)
    assert metric["pipes"][0]["length"] == pytest.approx(12 * 0.3048, rel=1e-12)
    assert us["pipes"][0]["bore"] == pytest.approx(1.049, rel=1e-12)


def test_nan_and_infinity_become_null() -> None:
    result = sample()
    broken = replace(
        result,
        nodes=(replace(result.nodes[0], pressure=math.nan),),
        supply=replace(result.supply, available_flow=math.inf),
    )
    text = result_json(broken)
    assert "NaN" not in text
    assert "Infinity" not in text
    record = json.loads(text)
    assert record["nodes"][0]["pressure"] is None
    assert record["supply"]["available_flow"] is None


def test_texts_of_findings_are_filled_and_foreign_braces_stay() -> None:
    texts = [finding["text"] for finding in result_record(sample())["findings"]]
    assert "The lowest head of the design area has 12.1 psi; the least allowed is 7.0 psi." in texts
    assert any("{unknown} stays" in text for text in texts)


def test_texts_are_kept_exactly() -> None:
    record = json.loads(result_json(sample(title='<b>"x"</b>\x07\n')))
    assert record["project"]["title"] == '<b>"x"</b>\x07\n'


def test_path_totals_add_up() -> None:
    totals = result_record(sample())["path_totals"]
    parts = ("head", "friction", "fittings", "elevation", "devices")
    assert sum(totals[name] for name in parts) == pytest.approx(totals["supply"], rel=1e-12)


def test_same_input_same_text() -> None:
    assert result_json(sample()) == result_json(sample())
