"""What names of columns tell: words that say what a column holds, and units written into a name."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Collection


def set_of(text: str) -> frozenset[str]:
    """Return the words of a text."""
    return frozenset(text.split())


TIME = set_of(
    "time timestamp datetime stamp date day when measured sampled taken recorded tested weighed opened "
    "zeit datum zeitpunkt uhrzeit fecha hora heure data tijd"
)
STREAM = set_of(
    "press machine line cavity tool station kiln spindle head nest mould mold die gauge bench cell "
    "furnace oven reactor tank filler extruder lathe mill robot equipment device channel lane unit "
    "plant mc maschine anlage presse linie werkzeug kavität kavitaet nest spindel ofen"
)
PLACE = set_of("cavity position pos nest spindle head probe sensor side place kavität kavitaet spindel")
COUNT_OF_ITEMS = set_of(
    "reject rejects rejected scrap scrapped nok bad failed fails defective defectives nonconforming "
    "cracked broken leaking leakers ausschuss"
)
COUNT_OF_EVENTS = set_of(
    "defects flaws faults stops stoppages errors failures nonconformities events scratches bubbles "
    "pinholes alarms accidents incidents complaints blemishes spots count counts fehler"
)
SIZE = set_of(
    "inspected checked tested produced examined size total sampled n qty quantity pieces units made "
    "opportunities geprüft menge"
)
IDENTITY = set_of(
    "id no nr num number serial batch lot order row index sample set firing part job run record seq "
    "barcode charge los auftrag"
)
FEATURE = set_of(
    "characteristic feature parameter property measurand measurement item tag test dimension merkmal "
    "quantity variable signal"
)
GENERIC_VALUE = set_of("value values result reading measurement measured data wert messwert y x v")
WHO = set_of("operator inspector shift user technician tester crew team name bediener prüfer schicht")
UNIT_COLUMN = set_of("unit units uom einheit")

_WORD = re.compile(r"[^\W\d_]+|[0-9]+")
_CAMEL = re.compile(r"(?<=[a-zäöü])(?=[A-ZÄÖÜ])")
_BRACKETED = re.compile(r"^(.*?\S)\s*(?:\[([^\[\]]{1,20})\]|\(([^()]{1,20})\))$", re.DOTALL)
_SUFFIX = {
    "mm": "mm", "um": "µm", "µm": "µm", "cm": "cm", "kg": "kg", "g": "g", "mg": "mg", "bar": "bar",
    "mbar": "mbar",
    "kpa": "kPa", "mpa": "MPa", "hpa": "hPa", "pct": "%", "percent": "%", "degc": "°C", "celsius": "°C",
    "rpm": "rpm", "ml": "ml", "kn": "kN", "ms": "ms", "sec": "s", "mv": "mV", "kv": "kV", "ma": "mA",
    "ppm": "ppm",
    "ntu": "NTU", "hrc": "HRC", "kw": "kW", "kwh": "kWh", "nmm": "N mm",
}  # fmt: skip
_DOUBTFUL_SUFFIX = {
    "nm": "N m",
    "c": "°C",
    "n": "N",
    "m": "m",
    "v": "V",
    "s": "s",
    "a": "A",
    "f": "°F",
    "k": "K",
}
_MOST_ID = 60


def words_of(name: str) -> tuple[str, ...]:
    """Return the words of a column's name in lower case: `shiftEnd_1` gives shift, end, 1."""
    return tuple(word.lower() for word in _WORD.findall(_CAMEL.sub(" ", name)))


def names_one_of(name: str, words: Collection[str]) -> bool:
    """Whether a column's name holds one of the words, also as the beginning of a longer compound."""
    return any(word in words for word in words_of(name))


def ends_in(name: str, words: Collection[str]) -> bool:
    """Whether the last word that says what a column is, `press` in `press_no 2`, is one of the words."""
    telling = [word for word in words_of(name) if word not in IDENTITY and not word.isdigit()]
    return bool(telling) and telling[-1] in words


def split_unit(name: str) -> tuple[str, str]:
    """Split a column's name into what is measured and its unit, which is empty where none is sure.

    A unit stands in brackets, `Length [mm]`, or as the last of several words, `bore_mm`; of a name that
    is nothing but a unit, `ntu`, nothing is left.
    """
    match = _BRACKETED.match(name)
    if match is not None:
        return match[1], (match[2] or match[3]).strip()
    head, mark, last = _last_word(name)
    unit = _SUFFIX.get(last.lower(), "")
    if not unit:
        return name, ""
    return head if mark else "", unit


def doubtful_unit(name: str) -> tuple[str, str]:
    """Split a name at a short last word that may be a unit, `peak_c`; the unit is empty where none is."""
    head, mark, last = _last_word(name)
    unit = _DOUBTFUL_SUFFIX.get(last.lower(), "") if mark == "_" and head else ""
    return (head, unit) if unit else (name, "")


def _last_word(name: str) -> tuple[str, str, str]:
    head, mark, last = name.rpartition("_")
    if not mark:
        head, mark, last = name.rpartition(" ")
    return head.strip(" _"), mark, last


def as_title(name: str) -> str:
    """Return a name as it may stand as a title: one line, blanks for underscores, a capital first."""
    text = " ".join(printable(name).replace("_", " ").split())
    return text[:1].upper() + text[1:]


def as_id(name: str) -> str:
    """Return a name in lower-case ASCII letters, digits and hyphens; empty where nothing is left of it."""
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode()
    return re.sub(r"[^a-z0-9]+", "-", plain.lower()).strip("-")[:_MOST_ID].strip("-")


def printable(text: str) -> str:
    """Return text on one line, without characters that steer a terminal or break a comment."""
    whole = text.encode("utf-8", "replace").decode()
    return "".join(c if c.isprintable() else " " for c in whole)


def unique(name: str, taken: Collection[str], *, instead: str = "") -> str:
    """Return the name, else the other, else the name with the first free number; compares without case."""
    lowered = {one.lower() for one in taken}
    for candidate in (name, instead):
        if candidate and candidate.lower() not in lowered:
            return candidate
    number = 2
    while f"{name}-{number}".lower() in lowered:
        number += 1
    return f"{name}-{number}"
