"""Reference data: every value with its source; a gas and a background are added without code."""

import copy

import numpy as np
import pytest
from pydantic import ValidationError

from handmade import make_batch, solar_system
from keptair import reference, stages
from keptair.errors import SettingsError
from keptair.reference.models import Background, Gas
from keptair.settings import Settings
from keptair.tables import schema

XENON = {
    "title": "Xe",
    "mass_u": 131.293,
    "mass_source": "CIAAW standard atomic weights",
    "diameter_pm": 405,
    "diameter_source": "value from memory",
}
METHANE_AIR = {
    "title": "Methane, for this test",
    "main_gas": "ch4",
    "mean_mass_u": 16.0,
    "upper_mass_u": 12.0,
    "key_escaper": "h2",
    "cross_section_m2": 3e-19,
    "inventory": [1e-5, 1e-3],
    "efficiency": [0.01, 0.1],
    "diffusion_partners": ["ch4"],
    "source": "invented for this test",
    "anchor": {
        "body": "Titan",
        "exobase_temperature_k": 150,
        "xuv_flux_earth": 0.0109,
        "gravity_m_s2": 1.354,
        "base_temperature_k": 71,
    },
}


def test_the_built_in_files_load_and_hold_together():
    settings = Settings()
    assert " ".join(settings.gases) == "h h2 he ch4 nh3 h2o ne n n2 co o o2 ar co2 so2"
    assert set(settings.backgrounds) == {"co2", "n2", "n2_icy", "h2", "steam"}
    assert len(reference.load_diffusion()) == 15
    temperatures = reference.load_main_sequence()["teff_k"]
    assert list(temperatures) == sorted(temperatures)


@pytest.mark.parametrize("name", ["mass_source", "diameter_source"])
def test_a_gas_without_a_source_is_refused(name):
    with pytest.raises(ValidationError, match=name):
        Gas.model_validate({key: value for key, value in XENON.items() if key != name})


def test_a_background_whose_anchor_is_colder_than_its_base_is_refused():
    cold = copy.deepcopy(METHANE_AIR)
    cold["anchor"]["exobase_temperature_k"] = 60
    with pytest.raises(ValidationError, match="must be above base_temperature_k"):
        Background.model_validate(cold)


@pytest.mark.parametrize(
    ("name", "value"), [("inventory", [0.1, 0.01]), ("cross_section_m2", 3.0), ("mean_mass_u", -1)]
)
def test_a_background_out_of_range_is_refused(name, value):
    with pytest.raises(ValidationError, match=name):
        Background.model_validate(METHANE_AIR | {name: value})


def test_a_gas_of_the_user_gets_its_columns_and_rows_without_code():
    settings = Settings.read(None, {"gases": {"xe": XENON}})
    done = stages.assess(make_batch(solar_system("earth")), settings)
    assert done.planets["jeans_parameter_xe"][0] == pytest.approx(
        done.planets["jeans_parameter_h"][0] * 131.293 / 1.008, rel=1e-12
    )
    rows = done.gases["gas"] == "xe"
    assert set(done.gases["background"][rows]) == {"co2", "n2", "h2"}
    assert set(done.gases["diffusion_source"][rows]) == {"hard_sphere"}


def test_a_background_of_the_user_can_be_given_and_asked_for_without_code():
    settings = Settings.read(
        None, {"backgrounds": {"methane": METHANE_AIR}, "use_backgrounds": ["co2", "methane"], "draws": 256}
    )
    earth = solar_system("earth")[0] | {"planet_id": "ours", "background": "methane"}
    done = stages.assess(make_batch([earth, *solar_system("earth")]), settings)
    assert done.planets["background"].tolist() == ["methane", "co2"]
    assert done.planets["background_source"].tolist() == ["given", "chosen"]
    assert np.isfinite(done.planets["retention_ch4"]).all()
    assert set(done.gases["background"]) == {"co2", "methane"}


def test_a_background_that_names_an_unknown_gas_is_refused():
    with pytest.raises(SettingsError, match="no gas 'phlogiston'"):
        Settings.read(None, {"backgrounds": {"odd": METHANE_AIR | {"main_gas": "phlogiston"}}})


def test_a_diffusion_pair_is_the_same_either_way_round():
    assert reference.diffusion_pair("h2", ("n2",)) == reference.diffusion_pair("n2", ("h2",))
    assert reference.diffusion_pair("so2", ("co2",)) is None


@pytest.fixture
def larger_package(monkeypatch):
    """The package as it would be with one gas and one background more in its own files."""
    more = {"gases": {"xe": XENON}, "backgrounds": {"methane": METHANE_AIR}}
    built_in = reference.read_toml
    monkeypatch.setattr(reference, "read_toml", lambda name: built_in(name) | more.get(name, {}))
    for loader in (reference.load_gases, reference.load_backgrounds):
        loader.cache_clear()
    yield
    for loader in (reference.load_gases, reference.load_backgrounds):
        loader.cache_clear()


@pytest.mark.usefixtures("larger_package")
def test_a_gas_and_a_background_in_the_packages_own_files_need_no_code_either():
    settings = Settings(use_backgrounds=("methane", "h2"), draws=256)
    done = stages.assess(make_batch(solar_system("earth")), settings)
    assert "retention_xe" in schema.table("planets").names
    assert np.isfinite(done.planets["retention_xe"]).all()
    assert set(done.gases["background"]) == {"co2", "methane", "h2"}  # co2 is the row's own
