"""What the fuzzer writes into cells, headers and maps: ordinary things, edges and mischief."""

from __future__ import annotations

from random import Random

from keptair.tables import schema

CANONICAL = tuple(schema.catalogue().names)
INPUTS = tuple(column.name for column in schema.inputs())
NUMBERS = schema.measured_inputs()

USUAL = ("1", "0.5", "5.3", "12", "300", "5772", "1.0", "0", "-1", "3.2e-1", "1.5D+02", "-0.3", "+2", "100", "8")
EDGES = (
    "1e308", "-1e308", "1e309", "1e-320", "4.9e-324", "inf", "-inf", "Infinity", "nan", "NaN", "-nan", "-0.0",
    "1e5000", "0." + "0" * 400 + "1", "9" * 400, "9007199254740993", "18446744073709551616", "-9223372036854775808",
    "1e", "e5", ".", "+", "1_000", "0x10", "1,5", "13.8", "13.800000000000001", "28", "1e-3", "99.9999999", "360",
    "-90", "1.0d309", "1E+", "٣", "１", "½", "1 2", "--1", "1.2.3", "00012", "−5", "1e-5000", "0.99", "1e1e1",
)  # fmt: skip
TEXTS = (
    "Kea 1 b", "kea-1b", "KEA 1 B", "=1+1", "@SUM(A1)", "-2+3", "+cmd|' /C calc'!A0", "<script>alert(1)</script>",
    "{{7*7}}", "../../etc/passwd", "/dev/zero", "%s%n", "${HOME}", "\x00", "a\x00b", "\x1b[2J", "\u202egpj.exe",
    "\ufeff", "\u2028", "\u200b", "\r", "\n", "\r\n", '"', '""', "'", "\\", "\t", ",", "|", "#", "# x", "%ECSV", "é",
    "ß", "İ", "ǆ", "😀", "\ud7ff", "\ufffe", "\uffff", "\U0010ffff", "null", "None", "--", "N/A", "...", "*", "?", "[",
    "(a+)+$", "a" * 129, "b" * 128, "c" * 3000, " " * 40, "\xa0", "\x85", "\x1f", "true", "FALSE", "measured",
    "relation", "minimum", "upper", "lower", "<", ">=", "ul", "yes", "no", "co2", "n2", "h2", "n2_icy", "xenon",
)  # fmt: skip
DATES = (
    "2024-02-30", "2024-02-29", "2024", "2024-13", "0000", "0000-00-00", "9999-12-31T23:59:59.999999", "24/12/31",
    "0001-01-01T00:00:00+23:59", "9999-12-31T23:59:59-23:59", "2024-W01", "20240101", "2024-060",
    "2024-01-01T24:00:00", "2024-01-01 00:00", "2024-01-01T00:00:00Z", "２０２４-01-01", "2024-1-1",
    "1970-01-01T00:00:00.000000001", "²⁰²⁴", "٢٠٢٤", "2024-01-01T00:00:00+24:00",
)  # fmt: skip
UNITS = (
    "", "earthRad", "jupiterRad", "R_earth", "M_e", "MJ", "solMass", "Msun", "yr", "Gyr", "dex(yr)", "dex", "[Gyr]",
    "[-]", "log10(L_sun)", "dex(dex(yr))", "K", "deg_C", "dex(K)", "deg", "hourangle", "mag", "%", "m", "km/s",
    "erg/s", "1e3 m", "furlong", "m**1e308", "10**400 m", "m^(1/0)", "((((((m))))))", "m m m m", "W m-2", "S_earth",
    "au", "0 m", "nan m", "dex()", "log()", "1e400 K", "-1 K", "\x00", "m" * 5000, "cd(m)", "mag(ct/s)", "dB",
    "deg_C / K", "10**-400 au", "°", "m2", "m**0.3333", "'earthRad'", "`m`", "m.m", "m/", "*", "sqrt(m)", "[[m]]",
    "dex(\n)", "(" * 200, "dex(" * 300, "h", "s", "c", "1", "unitless", "d", "kyr", "Ga", "lyr", "pc", "1e-200 m",
    "1e200 m", "imperial.mile", "1e308 au",
)  # fmt: skip
PATTERNS = (
    "%Y-%m-%d", "%y/%m/%d", "%", "%%", "%Q", "%j", "%Y %Y", "%s", "%c", "%Z", "%z", "%G-W%V-%u", "x%dx", "%f",
    "\x00%d", "%-d", "%Y" * 90,
)  # fmt: skip
SUFFIXES = ("_err_plus", "_err_minus", "_bound", "_kind", "_source", "", " ", "_", "s", "[K]", " (au)", "_ERR")


def cell(random: Random) -> str:
    """A cell of any column."""
    kind = random.random()
    if kind < 0.55:
        return random.choice(USUAL)
    if kind < 0.68:
        return random.choice(EDGES)
    if kind < 0.86:
        return random.choice(TEXTS)
    if kind < 0.91:
        return random.choice(DATES)
    if kind < 0.95:
        return f"{random.uniform(-1, 1) * 10 ** random.randint(-320, 308)!r}"
    letters = [
        random.choice((random.randrange(1, 0x250), random.randrange(0xD800))) for _ in range(random.randrange(8))
    ]
    return "".join(map(chr, letters))


def header(random: Random) -> str:
    """A column's name: often a canonical one, or nearly."""
    kind = random.random()
    if kind < 0.35:
        return random.choice(INPUTS)
    if kind < 0.6:
        return random.choice(NUMBERS) + random.choice(SUFFIXES)
    if kind < 0.7:
        name = random.choice(CANONICAL)
        place = random.randrange(len(name))
        return name[:place] + random.choice("_- xX\u200b.1") + name[place + random.randrange(2) :]
    if kind < 0.9:
        return random.choice(
            ("name", "Rp", "Mp", "P", "st_age", "x", "planet_id.mask", "x.mask", "", "1", "input_x", "row")
        )
    return cell(random)


def headers(random: Random, count: int) -> list[str]:
    """Names of some columns, mostly with the identifier among them."""
    orderly = random.random() < 0.4
    names = random.sample(CANONICAL, count) if orderly else [header(random) for _ in range(count)]
    if random.random() < 0.9:
        names[random.randrange(count)] = "planet_id"
    return names
