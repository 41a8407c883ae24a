"""datapackage.json of a run."""

import csv
import hashlib
import json

import pyarrow.parquet as pq
import pytest
from frictionless import Package, Resource

from keptair.runs import package
from keptair.tables import schema


@pytest.fixture(scope="module")
def described(finished):
    return json.loads((finished.run.path / "datapackage.json").read_text(encoding="utf-8"))


def resource(described, name):
    return next(resource for resource in described["resources"] if resource["path"] == name)


def test_it_is_a_data_package_of_version_2(described):
    assert described["$schema"] == "https://datapackage.org/profiles/2.0/datapackage.json"
    assert list(Package.metadata_validate(described)) == []


def test_every_file_is_listed_with_its_size_and_hash(finished, described):
    files = {file.name for file in finished.run.path.iterdir()} - {"datapackage.json"}
    assert {resource["path"] for resource in described["resources"]} == files
    for listed in described["resources"]:
        content = (finished.run.path / listed["path"]).read_bytes()
        assert listed["bytes"] == len(content)
        assert listed["hash"] == "sha256:" + hashlib.sha256(content).hexdigest()


@pytest.mark.parametrize("name", ["planets", "gases", "rejects", "changes"])
def test_every_table_obeys_its_schema(finished, described, name):
    listed = resource(described, f"{name}.parquet")
    table = pq.read_table(finished.run.path / listed["path"])
    assert [field["name"] for field in listed["schema"]["fields"]] == table.column_names
    assert listed["format"] == "parquet"
    if table.num_rows:
        # the rows as they are: frictionless's own reader of Parquet makes nan of null
        plain = {"$schema": listed["$schema"], "name": name, "data": table.to_pylist(), "schema": listed["schema"]}
        report = Resource.from_descriptor(plain).validate()
        assert report.flatten(["fieldName", "message"]) == []


def test_the_sheet_of_rejects_obeys_the_same_schema(finished, described):
    listed = resource(described, "rejects.csv")
    assert listed["schema"] == resource(described, "rejects.parquet")["schema"]
    with (finished.run.path / "rejects.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert [row["rule"] for row in rows] == ["identifier", "duplicate"]
    plain = {"$schema": listed["$schema"], "name": "sheet", "path": "rejects.csv", "schema": listed["schema"]}
    report = Resource.from_descriptor(plain, basepath=str(finished.run.path)).validate()
    assert report.flatten(["fieldName", "message"]) == []


def test_fields_say_unit_meaning_and_origin(described):
    fields = {field["name"]: field for field in resource(described, "planets.parquet")["schema"]["fields"]}
    assert fields["exobase_temperature_k"]["unit"] == "K"
    assert fields["exobase_temperature_k"]["derived_by"] == "keptair.physics.exobase.exobase_temperature"
    assert fields["input_note"]["type"] == "string"
    assert resource(described, "planets.parquet")["schema"]["primaryKey"] == ["planet_id"]


def test_bounds_are_as_exact_as_their_column():
    fields = {field["name"]: field for field in package.table_schema(schema.table("gases"))["fields"]}
    # 1e30 in IEEE 754 single precision
    assert fields["escape_time_gyr"]["constraints"]["maximum"] == pytest.approx(1.0000000150474662e30, rel=1e-15)
    assert fields["is_background"]["constraints"]["maximum"] == 1


def test_no_file_says_when_it_was_made_but_the_pointer(finished):
    stamp = finished.run.path.name[:16]
    year = f"{stamp[:4]}-{stamp[4:6]}-{stamp[6:8]}"
    for file in finished.run.path.glob("*.json"):
        assert year not in file.read_text(encoding="utf-8"), file
    for file in finished.run.path.glob("*.parquet"):
        assert year.encode() not in file.read_bytes(), file
