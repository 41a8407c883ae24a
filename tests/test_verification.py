"""The Solar System passes with the defaults and fails with settings that break it."""

import pytest

from keptair.errors import SettingsError
from keptair.settings import Settings
from keptair.verification import verify, with_solar_activity

BODY = """
[bodies.{key}]
title = "Thulimar"
gm_m3_s2 = 4e14
radius_m = 6.4e6
semi_major_axis_au = 1.0
bond_albedo = 0.3
albedo_source = "invented for this test"
expected = ["{verdict}"]
"""


def test_every_body_passes_with_the_default_settings():
    outcomes = verify(Settings())
    assert len(outcomes) == 15
    assert [one.body for one in outcomes if not one.passed] == []


def test_every_body_passes_at_the_scatter_of_other_stars_too():
    assert all(one.passed for one in verify(Settings.read(None, {"xuv.scatter_dex": 0.4})))


def test_ten_times_the_high_energy_light_breaks_venus_and_earth():
    outcomes = {one.body: one for one in verify(Settings.read(None, {"xuv.saturation_log10": -2.2}))}
    assert not outcomes["Venus"].passed
    assert not outcomes["Earth"].passed
    assert outcomes["Mercury"].passed


def test_the_suns_own_scatter_holds_unless_the_user_set_one():
    assert with_solar_activity(Settings(), {"xuv": {"scatter_dex": 0.2}}).xuv.scatter_dex == 0.2
    set_by_user = Settings.read(None, {"xuv.scatter_dex": 0.5})
    assert with_solar_activity(set_by_user, {"xuv": {"scatter_dex": 0.2}}).xuv.scatter_dex == 0.5


@pytest.mark.parametrize(("verdict", "passed"), [("secondary", True), ("envelope", False)])
def test_a_body_of_the_user_is_verified_too(tmp_path, verdict, passed):
    path = tmp_path / "bodies.toml"
    path.write_text(BODY.format(key="thulimar", verdict=verdict), encoding="utf-8")
    assert verify(Settings(), path)[-1].passed is passed


def test_bodies_that_cannot_be_used_are_all_named(tmp_path):
    path = tmp_path / "bodies.toml"
    text = BODY.format(key="one", verdict="cosy") + BODY.format(key="two", verdict="bare").replace("0.3", "1.3")
    path.write_text(text, encoding="utf-8")
    with pytest.raises(SettingsError) as caught:
        verify(Settings(), path)
    assert "[bodies.one] expected" in str(caught.value)
    assert "[bodies.two] bond_albedo" in str(caught.value)
