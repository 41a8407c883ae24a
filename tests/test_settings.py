"""Settings: defaults, files, flags, and every mistake said at once."""

import pytest

from keptair.errors import SettingsError
from keptair.settings import Settings


def write(tmp_path, text):
    path = tmp_path / "settings.toml"
    path.write_text(text, encoding="utf-8")
    return path


def test_the_defaults_are_those_the_contract_names():
    settings = Settings()
    assert (settings.draws, settings.epochs, settings.seed) == (512, 16, 1)
    assert settings.use_backgrounds == ("co2", "n2", "h2", "n2_icy")
    assert (settings.verdict.keep, settings.verdict.lose, settings.verdict.envelope) == (0.8, 0.2, 0.9)
    assert (settings.bond_albedo, settings.redistribution) == ((0.0, 0.5), 0.25)
    assert (settings.frost_pressure_pa, settings.conduction_limit_k) == (10.0, 1e4)
    assert (settings.excess_heat, settings.gas_rows, settings.mass_radius) == ("outflow", "all", "chen-kipping-2017")
    assert (settings.xuv.law, settings.xuv.scatter_dex) == ("saturated-power-law", 0.4)
    assert (settings.trace_mixing_ratio, settings.max_rejects) == (1e-6, 0.2)


def test_a_flag_beats_a_file_and_a_file_beats_the_default_and_each_says_so(tmp_path):
    path = write(tmp_path, "draws = 256\nseed = 7\n[xuv]\nscatter_dex = 0.1\n")
    settings = Settings.read(path, {"seed": 9})
    assert (settings.draws, settings.seed, settings.xuv.scatter_dex) == (256, 9, 0.1)
    origins = [settings.origin(name) for name in ("draws", "seed", "xuv.scatter_dex", "epochs")]
    assert origins == [str(path), "command line", str(path), "default"]


def test_all_mistakes_are_said_at_once_with_what_is_allowed(tmp_path):
    path = write(
        tmp_path,
        'draws = 500\nexcess_heat = "vanish"\nbond_albedo = [0.5, 0.1]\nspeed = 3\n[verdict]\nkeep = 1.5\n',
    )
    with pytest.raises(SettingsError) as caught:
        Settings.read(path)
    message = str(caught.value)
    assert "5 problems" in message
    for name in ("draws = 500", "excess_heat", "bond_albedo", "speed: there is no such setting", "verdict.keep = 1.5"):
        assert name in message
    assert "256" in message
    assert "less than or equal to 1" in message
    assert caught.value.exit_code == 2


@pytest.mark.parametrize(
    ("content", "said"),
    [(b"draws = = 3", "is not TOML"), (b"draws = '\xff'", "is not UTF-8"), (None, "cannot be read")],
)
def test_a_file_that_cannot_be_used_is_one_sentence(tmp_path, content, said):
    path = tmp_path / "settings.toml"
    if content is not None:
        path.write_bytes(content)
    with pytest.raises(SettingsError, match=said):
        Settings.read(path)


def test_a_threshold_to_lose_above_the_one_to_keep_is_refused():
    with pytest.raises(SettingsError, match="lose must not be above keep"):
        Settings.read(None, {"verdict.keep": 0.3, "verdict.lose": 0.4})


def test_a_background_of_the_user_is_merged_over_the_built_in_one(tmp_path):
    path = write(tmp_path, "[backgrounds.co2]\ncross_section_m2 = 4e-19\n")
    settings = Settings.read(path)
    assert settings.backgrounds["co2"].cross_section_m2 == 4e-19
    assert settings.backgrounds["co2"].anchor == Settings().backgrounds["co2"].anchor
    assert settings.backgrounds["n2"] == Settings().backgrounds["n2"]


def test_what_cannot_change_a_number_is_not_among_the_numbers():
    assert {"batch_planets", "max_rejects"}.isdisjoint(Settings().numbers())


def test_settings_cannot_be_changed_in_place():
    with pytest.raises(ValueError, match="frozen"):
        Settings().draws = 256
