"""Every assumption a user may change: one frozen model; default, then TOML file, then flag."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Annotated, Any, Literal, Self

from pydantic import AfterValidator, BaseModel, ConfigDict, Field, PrivateAttr, ValidationError, model_validator

from keptair import toml_files
from keptair.errors import SettingsError, counted
from keptair.reference import load_backgrounds, load_gases, load_power_law
from keptair.reference.models import Background, Gas


def _in_order(ends: tuple[float, float]) -> tuple[float, float]:
    if ends[0] > ends[1]:
        raise ValueError("should be [low, high]")
    return ends


Probability = Annotated[float, Field(ge=0, le=1)]
Positive = Annotated[float, Field(gt=0)]
Albedo = Annotated[float, Field(ge=0, le=0.99)]
Age = Annotated[float, Field(ge=0.01, le=13.8)]  # [Gyr]
Positives = Annotated[tuple[Positive, Positive], AfterValidator(_in_order)]
Albedos = Annotated[tuple[Albedo, Albedo], AfterValidator(_in_order)]
Ages = Annotated[tuple[Age, Age], AfterValidator(_in_order)]


def number(default: Any, unit: str, meaning: str, **bounds: Any) -> Any:
    """A setting with its unit and meaning in reach of `keptair settings`."""
    return Field(default, description=meaning, json_schema_extra={"unit": unit}, **bounds)


class Group(BaseModel):
    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False, validate_default=True)


class Verdict(Group):
    """Where probability becomes a verdict."""

    keep: Probability = number(0.8, "", "secondary from this probability of keeping the background")
    lose: Probability = number(0.2, "", "bare up to this probability")
    envelope: Probability = number(0.9, "", "envelope from this share of draws lighter than rock")
    near: Probability = number(0.02, "", "flag near_threshold within this distance of a threshold")
    radius_only_rearth: float = number(1.8, "earthRad", "without a measured mass, an envelope above this radius", gt=0)
    quick_rule: float = number(6.0, "", "the quick rule keeps a gas above this ratio of escape to rms speed", gt=0)

    @model_validator(mode="after")
    def in_order(self) -> Self:
        if self.lose > self.keep:
            raise ValueError("lose must not be above keep")
        return self


_LAW = load_power_law()


class HighEnergyLight(Group):
    """The star's X-ray and extreme-ultraviolet light."""

    law: Literal["saturated-power-law", "ribas-2005", "sanz-forcada-2011"] = number(
        "saturated-power-law", "", "how high-energy light fades with age"
    )
    scatter_dex: float = number(
        _LAW.scatter_dex, "dex", "scatter of one star about the law, constant in time", ge=0, le=2
    )
    measured_scatter_dex: float = number(0.3, "dex", "the same where X-rays were measured", ge=0, le=2)
    saturation_log10: float = number(
        _LAW.saturation_log10, "dex", "log10 of L_XUV over L_bol while saturated", ge=-6, le=-1
    )
    saturation_gyr: float = number(
        _LAW.saturation_gyr, "Gyr", "end of saturation for a star of one solar mass", gt=0, le=5
    )
    saturation_mass_exponent: float = number(
        _LAW.saturation_mass_exponent, "", "saturation time goes as stellar mass to this power", ge=-5, le=5
    )
    saturation_mass_cap_msun: float = number(
        _LAW.saturation_mass_cap_msun, "solMass", "stars above this mass saturate as one of it", gt=0
    )
    coronal_cap: float = number(2.0, "", "light of a corona: at most this times that of a dwarf of its mass", ge=1)
    coronal_cap_above_msun: float = number(0.6, "solMass", "only for stars above this mass", gt=0)
    giant_radius_rsun: float = number(2.5, "solRad", "flag xuv_extrapolated above this radius", gt=0)
    dwarf_teff_k: Positives = number((2400.0, 6500.0), "K", "flag xuv_extrapolated outside")
    decline_exponent: float = number(_LAW.decline_exponent, "", "light fades as age to minus this power", gt=0, le=4)


class Settings(Group):
    """All settings of a run. `Settings.read(path)` takes a TOML file."""

    draws: Literal[256, 512, 1024, 2048] = number(512, "", "draws per planet")
    epochs: int = number(16, "", "epochs of the loss integral", ge=4, le=256)
    seed: int = number(1, "", "seed of the draws", ge=0)
    use_backgrounds: tuple[str, ...] = number(
        ("co2", "n2", "h2", "n2_icy"),
        "",
        "backgrounds of gases.parquet (n2_icy only where CO2 is frozen)",
        min_length=1,
    )
    gas_rows: Literal["all", "chosen", "none"] = number("all", "", "rows of gases.parquet")
    batch_planets: int = number(128, "", "planets worked on together; never changes a number", ge=1, le=100_000)
    max_rejects: Probability = number(0.2, "", "more rows set aside than this share: latest does not move")

    bond_albedo: Albedos = number((0.0, 0.5), "", "uniform prior of a missing Bond albedo")
    age_prior_gyr: Ages = number((1.0, 10.0), "Gyr", "uniform prior of a missing age")
    redistribution: float = number(0.25, "", "1/4 full, 1/2 day side, 2/3 bare rock, 1 substellar", gt=0, le=1)
    limit_reach: float = number(3.0, "", "a lower limit is drawn up to this many times itself, log-uniform", ge=1)
    largest_cosine: float = number(
        0.996, "", "cos i of a planet that need not transit is uniform up to this", ge=0, lt=1
    )
    substellar_mjup: float = number(13.0, "jupiterMass", "flag substellar above this mass", gt=0)
    dwarf_departure: float = number(1.5, "", "a star further than this factor from its mean dwarf is none", gt=1)
    emissivity: float = number(1.0, "", "infrared emissivity", gt=0, le=1)
    insolation_tolerance: float = number(0.15, "", "flag where two insolations differ by more (and by 2 sigma)", gt=0)

    reference_pressure_pa: float = number(1e5, "Pa", "pressure at the catalogue radius", gt=1, le=1e9)
    homopause_pressure_pa: float = number(0.1, "Pa", "pressure up to which the air is well mixed", gt=1e-4, le=10)
    damping_exponent: Positives = number((0.7, 1.2), "", "exponent s of the conductive scaling, uniform")
    conduction_limit_k: float = number(1e4, "K", "hottest exobase; beyond it conduction cannot carry the heat", ge=500)
    excess_heat: Literal["outflow", "radiate"] = number("outflow", "", "what becomes of heat beyond that limit")
    frost_pressure_pa: float = number(10.0, "Pa", "a gas below this saturation pressure is frozen out", gt=0)
    exobase_weight: float = number(0.75, "", "share of T_exo in the mean of the upper air; the rest is T_b", ge=0, le=1)
    largest_hydrogen_share: Probability = number(0.9, "", "largest hydrogen share a radius can ask for")
    exobase_radius_cap: float = number(30.0, "", "air reaching beyond this many planet radii is not bound", gt=1)

    jeans_factor: Positives = number((0.5, 1.7), "", "correction of the Jeans flux, log-uniform")
    outflow_jeans_parameter: float = number(2.5, "", "the background flows out below this Jeans parameter", gt=0)
    roche_factor_floor: float = number(0.02, "", "smallest tidal factor of the energy limit", gt=0, le=1)
    trace_mixing_ratio: float = number(1e-6, "", "homopause mixing ratio fluxes of traces are given for", gt=0, le=1)
    start_gyr: Ages = number((0.1, 0.5), "Gyr", "when outgassing overtakes early loss, log-uniform")

    verdict: Verdict = Field(Verdict(), description="where probability becomes a verdict")
    xuv: HighEnergyLight = Field(HighEnergyLight(), description="the star's high-energy light")
    mass_radius: Literal["chen-kipping-2017", "otegi-2020"] = number(
        "chen-kipping-2017", "", "relation that fills a missing mass or radius"
    )
    backgrounds: dict[str, Background] = Field(default_factory=load_backgrounds, description="main gases of upper air")
    gases: dict[str, Gas] = Field(default_factory=load_gases, description="particles followed at the exobase")

    _origin: dict[str, str] = PrivateAttr(default_factory=dict)

    @model_validator(mode="before")
    @classmethod
    def merged_over_the_built_in(cls, values: Any) -> Any:
        """[backgrounds.<key>] and [gases.<key>] of a file change or add entries; the others stay."""
        if not isinstance(values, Mapping):
            return values
        built_in: dict[str, Mapping[str, BaseModel]] = {"backgrounds": load_backgrounds(), "gases": load_gases()}
        merged = dict(values)
        for name, entries in built_in.items():
            given = values.get(name)
            if isinstance(given, Mapping) and all(isinstance(entry, Mapping) for entry in given.values()):
                plain: dict[str, Any] = {key: entry.model_dump(exclude_none=True) for key, entry in entries.items()}
                merged[name] = {**plain, **{key: _merge(plain.get(key, {}), entry) for key, entry in given.items()}}
        return merged

    @model_validator(mode="after")
    def names_known(self) -> Self:
        problems = [
            f"use_backgrounds: no background {key!r}" for key in self.use_backgrounds if key not in self.backgrounds
        ]
        for key, background in self.backgrounds.items():
            for role in ("main_gas", "key_escaper"):
                if getattr(background, role) not in self.gases:
                    problems.append(f"backgrounds.{key}.{role}: no gas {getattr(background, role)!r}")
            if not any(partner in self.gases for partner in background.diffusion_partners):
                problems.append(f"backgrounds.{key}.diffusion_partners: name at least one gas")
        problems += [
            f"backgrounds: {key!r} may not be left out"
            for key in ("co2", "h2", "n2_icy")
            if key not in self.backgrounds
        ]
        if problems:
            raise ValueError("; ".join(problems))
        return self

    @classmethod
    def read(cls, path: str | Path | None = None, flags: Mapping[str, Any] | None = None) -> Settings:
        """Defaults, then the TOML file, then the flags of the command line (dotted names)."""
        values: dict[str, Any] = {}
        origin: dict[str, str] = {}
        if path is not None:
            values = _read_file(Path(path))
            origin = {name: str(path) for name in flat_names(values)}
        for name, value in (flags or {}).items():
            *groups, last = name.split(".")
            place = values
            for group in groups:
                place = place.setdefault(group, {})
            place[last] = value
            origin[name] = "command line"
        try:
            settings = cls.model_validate(values)
        except ValidationError as error:
            raise SettingsError(
                f"{path or 'settings'}: the settings cannot be used ({counted(error.error_count(), 'problem')})",
                [_sentence(problem) for problem in error.errors()],
                "keptair settings",
            ) from None
        settings._origin.update(origin)
        return settings

    def origin(self, name: str) -> str:
        """Where a setting's value came from: default, the file's path, or command line."""
        return self._origin.get(name, "default")

    def numbers(self) -> dict[str, Any]:
        """The settings that can change a number, ready for JSON."""
        everything: dict[str, Any] = json.loads(self.model_dump_json())
        for name in ("batch_planets", "max_rejects"):
            del everything[name]
        return everything


def flat_names(values: Mapping[str, Any], prefix: str = "") -> Iterator[str]:
    """Dotted names of every leaf."""
    for name, value in values.items():
        if isinstance(value, Mapping):
            yield from flat_names(value, f"{prefix}{name}.")
        else:
            yield prefix + name


def _merge(old: Mapping[str, Any], new: Mapping[str, Any]) -> dict[str, Any]:
    merged = dict(old)
    for name, value in new.items():
        inner = merged.get(name)
        merged[name] = _merge(inner, value) if isinstance(inner, Mapping) and isinstance(value, Mapping) else value
    return merged


def _read_file(path: Path) -> dict[str, Any]:
    values, _ = toml_files.read(path, SettingsError)
    return values


def _sentence(problem: Any) -> str:
    where = ".".join(str(part) for part in problem["loc"])
    given = problem.get("input")
    shown = f" = {json.dumps(given)}" if isinstance(given, (str, int, float, bool)) else ""
    if problem["type"] == "extra_forbidden":
        return f"{where}: there is no such setting"
    message = problem["msg"].removeprefix("Value error, ")
    return f"{where}{shown}: {message[0].lower() + message[1:]}" if where else message
