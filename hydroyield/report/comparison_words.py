"""A comparison in words, for the page and the terminal."""

from __future__ import annotations

from collections.abc import Iterator

from hydroyield.comparison.compared import PlantComparison
from hydroyield.options.differences import in_words
from hydroyield.options.option import Option
from hydroyield.options.ranking import Choice
from hydroyield.quantities import rounded
from hydroyield.report import words

DIGITS = 4  # options differ in the third


def option_name(option: Option) -> str:
    """An option as people speak of it: "option 3: 2 x kaplan, 6.2 m3/s together"."""
    mix = option.combination
    pipe = "" if mix.pipe_diameter is None else f", pipe of {mix.pipe_diameter:g} m"
    size = words.discharge(mix.design_discharge)
    return f"option {option.number}: {mix.units(option.machine)}, {size} together{pipe}"


def answer(found: PlantComparison) -> str:
    """The answer in a sentence: the best of the first aim, and what cannot be told from it."""
    chosen = found.choices[0].option
    refused = f", {len(found.refused)} combinations are no plants" if found.refused else ""
    total = f"{len(found.options)} options computed{refused}."
    if chosen is None:
        return f"{total} None keeps the limits."
    kept = sum(found.within_limits)
    most = "The most energy"
    if kept < len(found.options):
        most += (
            f" of the {kept} that keep the limits" if kept > 1 else ", the only one within limits"
        )
    close = 0 if found.differences is None else len(found.differences.indistinguishable)
    apart = "another cannot" if close == 1 else f"{close} others cannot"
    return (
        f"{total} {most}: {option_name(chosen)}, "
        f"{rounded(chosen.mean_annual_energy, DIGITS)} MWh a year at a capacity factor of "
        f"{words.percent(chosen.capacity_factor)}"
        + (f"; {apart} be told apart from it with the evidence at hand." if close else ".")
    )


def marked(number: int, within_limits: bool) -> str:
    """The number of an option, in brackets where it does not keep the limits."""
    return str(number) if within_limits else f"({number})"


def real_differences(found: PlantComparison) -> str:
    """Which differences are real, in words; "" where there is nothing to compare."""
    if found.differences is None:
        return ""
    among = "" if all(found.within_limits) else "Among the options that keep the limits: "
    text = in_words(found.differences)
    return among + (text[0].lower() + text[1:] if among else text)


def choice_rows(found: PlantComparison) -> list[tuple[str, ...]]:
    """(aim, option, energy, capacity factor, best size, nearly as good) of each aim."""
    return [_choice(found, choice) for choice in found.choices]


def _choice(found: PlantComparison, choice: Choice) -> tuple[str, ...]:
    option = choice.option
    if option is None:
        return (choice.aim.words, "none keeps the limits", "", "", "", "")
    sizing = found.sizings.get(choice.aim.name)
    best = within = "one size only"
    if sizing is not None:
        best = words.discharge(sizing.best)
        best += ", the end of those listed" if sizing.at_end else ""
        best += ", at the limit" if sizing.at_limit else ""
        low = " or less" if sizing.low_at_end else " (limit)" if sizing.low_at_limit else ""
        high = " or more" if sizing.high_at_end else " (limit)" if sizing.high_at_limit else ""
        within = f"{words.discharge(sizing.low)}{low} to {words.discharge(sizing.high)}{high}"
    return (
        choice.aim.words,
        option_name(option),
        f"{rounded(option.mean_annual_energy, DIGITS)} MWh",
        words.percent(option.capacity_factor),
        best,
        within,
    )


def season_rows(found: PlantComparison) -> Iterator[tuple[str, str]]:
    """Which years and quarters the tables speak of."""
    seasons = found.seasons
    if not seasons.years:
        yield "Years", "none: the river is known by a duration table alone"
        return
    for name in ("dry", "median", "wet"):
        yield f"The {name} year", f"{seasons.years[getattr(seasons, name)]}, by the river's mean"
    yield "The driest quarter", words.months_in_turn(seasons.driest_quarter)
    yield "The wettest quarter", words.months_in_turn(seasons.wettest_quarter)
