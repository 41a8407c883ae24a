"""Writes the invented Brindlemoor Survey: survey.csv, survey_dirty.csv and survey_other_names.csv.

    python sample_data/make_survey.py [FOLDER]

No planet or star in it exists. The seed is fixed, so the files come out the same, byte for byte.
"""

import csv
import sys
from pathlib import Path

from invented.other_names import renamed
from invented.table import WITHDRAWN, columns, survey_rows

SEED = 20260302
CLEAN_COPIES = 60

# One cell rule broken in each; the last is also a name a spreadsheet would run.
BROKEN_CELLS: tuple[dict[str, str], ...] = (
    {"stellar_mass_msun": "see note 3"},
    {"orbital_period_d": "inf"},
    {"planet_mass_mearth": "-3.2", "planet_mass_mearth_bound": "", "planet_mass_kind": "measured"},
    {"eccentricity": "1.3", "eccentricity_bound": ""},
    {"bond_albedo": "1.2"},
    {
        "stellar_age_gyr": "28",
        "stellar_age_gyr_err_plus": "",
        "stellar_age_gyr_err_minus": "",
        "stellar_age_gyr_bound": "",
    },
    {"stellar_teff_k": "20"},
    {"background": "phlogiston"},
    {"transits": "maybe"},
    {"planet_id": "=cmd()", "updated": "31/12/2025"},
)
COMMENTS = (
    "# Brindlemoor Survey, as kept by another team. Invented: no planet or star here exists.",
    "# Read it with survey_other_names.toml. Radii and masses in Jupiters, ages as log10 of years.",
)


def dirty_lines(header: list[str], lines: list[list[str]]) -> list[list[str]]:
    """The first rows as they are, then five that break a row rule and ten that break a cell rule."""
    rows = [dict(zip(header, line, strict=True)) for line in lines[CLEAN_COPIES:]]
    repeated = dict(zip(header, lines[6], strict=True))
    broken_rows = [
        list((rows[0] | {"planet_id": ""}).values()),
        list((repeated | {"updated": "2019-05-04"}).values()),
        list(rows[1].values())[:-1],
        [*rows[2].values(), "one too many"],
        list((rows[3] | {"planet_id": "=cmd()" * 22}).values()),
    ]
    broken_cells = [list((row | damage).values()) for row, damage in zip(rows[4:], BROKEN_CELLS, strict=False)]
    return lines[:CLEAN_COPIES] + broken_rows + broken_cells


def write_csv(path: Path, header: list[str], lines: list[list[str]], comments: tuple[str, ...] = ()) -> None:
    with path.open("w", encoding="utf-8", newline="") as file:
        file.writelines(comment + "\n" for comment in comments)
        csv.writer(file, lineterminator="\n").writerows([header, *lines])


def main(folder: Path) -> None:
    rows = survey_rows(SEED)
    header = columns()
    lines = [[row.get(name, "") for name in header] for row in rows if row["status"] not in WITHDRAWN]
    others = [renamed(row) for row in rows]
    write_csv(folder / "survey.csv", header, lines)
    write_csv(folder / "survey_dirty.csv", header, dirty_lines(header, lines))
    write_csv(folder / "survey_other_names.csv", list(others[0]), [list(row.values()) for row in others], COMMENTS)


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
