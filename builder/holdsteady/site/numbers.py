"""Numbers as a page shows them: rounded here and nowhere else, with the unit of what was measured."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

_SIGNIFICANT = 4
_WORDS = (
    "none", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven",
    "twelve", "thirteen", "fourteen", "fifteen",
)  # fmt: skip
_THIN = "\u202f"  # narrow no-break space between thousands, and before a percent sign


def known(value: float) -> bool:
    """Whether there is a number: results hold NaN where a point has none."""
    return not math.isnan(value)


def spelled(count: int) -> str:
    """Return 'nine' for 9, '18' for 18: counts up to fifteen are words, as the rules name them."""
    return _WORDS[count] if 0 <= count < len(_WORDS) else grouped(f"{count:d}")


def counted(count: int, singular: str, plural: str = "") -> str:
    """Return '1 reading', '2 readings'."""
    return f"{grouped(f'{count:d}')} {singular if count == 1 else plural or singular + 's'}"


def opened(text: str) -> str:
    """Return the text with a capital first letter, the rest as it is."""
    return text[:1].upper() + text[1:]


def listed(parts: list[str]) -> str:
    """Return 'a', 'a and b', 'a, b and c'."""
    return parts[0] if len(parts) == 1 else f"{', '.join(parts[:-1])} and {parts[-1]}" if parts else ""


def grouped(digits: str) -> str:
    """Group the whole part in threes from five digits on, with a true minus sign."""
    sign = "−" if digits.startswith("-") else ""
    whole, point, rest = digits.lstrip("-").partition(".")
    if len(whole) > 4 and whole.isdigit():
        whole = f"{int(whole):,}".replace(",", _THIN)
    return sign + whole + point + rest


def plain(value: float, *, significant: int = _SIGNIFICANT) -> str:
    """Return a number to so many significant digits; whole numbers stay whole."""
    if value == round(value) and abs(value) < 1e9:
        return grouped(f"{value + 0.0:.0f}")
    magnitude = math.floor(math.log10(abs(value)))
    if not -6 < magnitude < 9:
        return f"{value:.{significant - 1}e}".replace("-", "−")
    return grouped(f"{value:.{max(significant - 1 - magnitude, 0)}f}")


def exact(value: float) -> str:
    """Return a number with all the digits it was written with."""
    digits = repr(value + 0.0)
    if "e" in digits:
        return digits.replace("-", "−")
    return grouped(digits.removesuffix(".0"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Scale:
    """How the values of one statistic are written.

    Fractions are written in percent, with `decimals` counting the percentage's; counts stay whole.
    """

    statistic: str
    unit: str = ""
    decimals: int | None = None

    def bare(self, value: float) -> str:
        """Return the number alone, rounded to `decimals`, though never to a zero that it is not."""
        if self.statistic == "fraction":
            value *= 100
        if self.statistic == "count" and value == round(value):
            return plain(value)
        if self.decimals is None:
            return plain(value)
        digits = f"{value:.{self.decimals}f}"
        if float(digits) == 0:
            return plain(value, significant=1) if value != 0 else grouped(digits.lstrip("-"))
        return grouped(digits)

    def apart(self, value: float, limit: float) -> tuple[str, str]:
        """Return both numbers with their unit, with as many more digits as it takes to tell them apart."""
        texts = self.value(value), self.value(limit)
        factor = 100 if self.statistic == "fraction" else 1
        for more in range(1, 13):
            if texts[0] != texts[1]:
                break
            if self.decimals is None:
                digits = _SIGNIFICANT + more
                first, second = (plain(v * factor, significant=digits) for v in (value, limit))
                texts = self.with_unit(first), self.with_unit(second)
            else:
                written = replace(self, decimals=self.decimals + more)
                texts = written.value(value), written.value(limit)
        return texts

    def value(self, value: float) -> str:
        """Return the number with its unit: '12.004 mm', '2.2 %'."""
        return self.with_unit(self.bare(value))

    def with_unit(self, text: str) -> str:
        """Return a number already written, with the unit behind it."""
        if self.statistic == "fraction":
            return f"{text}{_THIN}%"
        return f"{text} {self.unit}" if self.unit else text

    def difference(self, value: float) -> str:
        """Return the size of a difference: '0.004 mm', '1.2 percentage points'."""
        if self.decimals is None or self.statistic == "count":
            # An estimate: two digits say all that it knows.
            text = plain(abs(value) * (100 if self.statistic == "fraction" else 1), significant=2)
        else:
            text = self.bare(abs(value))
        return f"{text} percentage points" if self.statistic == "fraction" else self.with_unit(text)

    def figure(self, value: float, *, unit: bool) -> str:
        """Return a figure of a calculation: four significant digits, and a decimal more than a reading has.

        Zeros at the end go, down to the decimals of a reading. A fraction that bears a unit is in percent.
        """
        if unit and self.statistic == "fraction":
            return self.with_unit(_without_zeros(plain(100 * value), 0))
        text, fewest = plain(value), 0
        if unit and self.decimals is not None and abs(value) < 1e9:
            longer = f"{value:.{self.decimals + 1}f}"
            text = max(text, grouped(longer), key=len) if float(longer) else text
            fewest = self.decimals
        text = _without_zeros(text, fewest)
        return f"{text} {self.unit}" if unit and self.unit else text


def _without_zeros(text: str, fewest: int) -> str:
    """Return a number without the zeros at its end, down to the fewest decimals wanted."""
    whole, point, decimals = text.partition(".")
    if not point or "e" in text:
        return text
    kept = decimals[:fewest] + decimals[fewest:].rstrip("0")
    return f"{whole}.{kept}" if kept else whole
