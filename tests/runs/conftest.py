"""A small catalogue and one run of it."""

from types import SimpleNamespace

import pytest

import keptair
from keptair import Settings

ROWS = """\
planet_id,host_id,planet_radius_rearth,planet_radius_rearth_err_plus,planet_radius_rearth_err_minus,planet_mass_mearth,\
orbital_period_d,stellar_teff_k,stellar_radius_rsun,stellar_mass_msun,j_mag,note
Aster b,Aster,1.05,0.1,-0.1,1.2,11.2,3100,0.2,0.17,9.1,first
Aster c,Aster,2.4,0.2,-0.2,7.5,24.6,3100,0.2,0.17,9.1,=1+1
,Nameless,1.0,,,1.0,10,5700,1,1,8,
Aster b,Aster,1.05,,,,11.2,3100,0.2,0.17,9.1,twin
=Boreal b,Boreal,11.3,0.5,-0.5,300,4.2,5900,1.1,1.05,far,a note that is rather long
Cirro b,Cirro,0.7,,,0.3,88,5750,1.0,1.0,7,
Dune b,Dune,,,,,,,,,,
"""
MAP = """\
[file]
carry = ["note"]
"""


@pytest.fixture(scope="session")
def quick():
    """Settings of a run that takes no time."""
    return Settings(draws=256, epochs=4, max_rejects=0.5)


@pytest.fixture(scope="session")
def catalogue(tmp_path_factory):
    """Seven rows: five planets, one row without a name, one planet twice; one cell is no number."""
    file = tmp_path_factory.mktemp("catalogue") / "catalogue.csv"
    file.write_text(ROWS, encoding="utf-8")
    return file


@pytest.fixture(scope="session")
def column_map(tmp_path_factory):
    """The canonical columns, and `note` taken along."""
    names = [name for name in ROWS.partition("\n")[0].split(",") if not name.endswith(("plus", "minus", "note"))]
    entries = [f'[columns.{name}]\nfrom = "{name}"\n' for name in names]
    errors = 'plus = "planet_radius_rearth_err_plus"\nminus = "planet_radius_rearth_err_minus"\n'
    text = MAP + "".join(entry + (errors if "planet_radius_rearth]" in entry else "") for entry in entries)
    file = tmp_path_factory.mktemp("map") / "map.toml"
    file.write_text(text, encoding="utf-8")
    return file


@pytest.fixture(scope="session")
def finished(catalogue, column_map, quick, tmp_path_factory):
    """One run, for tests that only read it."""
    out = tmp_path_factory.mktemp("out")
    return SimpleNamespace(out=out, run=keptair.run(catalogue, out, quick, column_map, workers=1))
