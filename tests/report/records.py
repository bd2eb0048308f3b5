"""Records for the tests of the report: the fixtures, and a fixture with text put in everywhere."""

import json
from pathlib import Path
from typing import Any

import yaml

FOLDER = Path(__file__).parent
FIXTURES = ("harbour", "one-set", "nothing-read")
SURROGATE = "a\udc80b"


def fixture(name: str) -> dict[str, Any]:
    """A record in the shape of the published schema."""
    return json.loads((FOLDER / "fixtures" / f"{name}.json").read_text(encoding="utf-8"))


def bulky(sets: int) -> dict[str, Any]:
    """A record of so many different sets, each with findings, and as many errors."""
    record = fixture("harbour")
    crane = next(s for s in record["parameter_sets"] if s["name"] == "crane telemetry")
    record["parameter_sets"] = [
        crane
        | {"digest": f"{number:064x}", "name": f"set {number} {40 * '🏗'}", "id": f"x#{number}"}
        for number in range(sets)
    ]
    record["errors"] *= sets
    return record


def hostile_texts() -> list[str]:
    """The corpus; a lone surrogate cannot stand in a file and is put in here."""
    entries = yaml.safe_load((FOLDER / "hostile_text.yaml").read_text(encoding="utf-8"))
    return [SURROGATE if entry["text"] == "surrogate" else entry["text"] for entry in entries]


def with_text(text: str, name: str = "harbour") -> dict[str, Any]:
    """A fixture in which ``text`` stands wherever text from outside can stand."""
    record = fixture(name)
    for item in record["inputs"]:
        item["path"] += text
    for number, item in enumerate(record["parameter_sets"]):
        _into_set(item, text, number)
    for item in record["errors"]:
        item["path"] += text
        item["message"] = f"found {text}"
    record["errors"].append({"path": text, "line": None, "column": None, "message": text})
    record["skipped"].append({"path": text, "reason": text})
    record["notices"].append(text)
    for book in record["rulebooks"]:
        book["title"] = f"{book['title']} {text}"
        book["notes"] = [text]
    return record


def _into_set(item: dict[str, Any], text: str, number: int) -> None:
    item["name"] = f"{text} {number}"
    item["id"] = f"{item['source']['path']}{text}#{text} {number}"
    item["declaration"]["name"] = item["name"]
    item["source"]["path"] += text
    for place in item["places"]:
        place["path"] += text
        place["name"] = text
    for party in item["declaration"].get("parties", []):
        party["role"] = text
    for finding in item["findings"]:
        finding["statement"] = f"{text} {finding['statement']}"
        finding["cautions"] = [text]
        finding["values"]["usage.protocol"] = text
        if finding["remedy"]:
            finding["remedy"]["text"] = text
            finding["remedy"]["breaks"] = [text]
        if finding["concession"]:
            finding["concession"]["by"] = text
    item["properties"].append({"name": text, "statement": text, "source": text})
    item["facts"]["usage.protocol"] = {
        "value": text,
        "standing": "declared",
        "tight": True,
        "claims": [],
        "rests_on": [text],
    }
