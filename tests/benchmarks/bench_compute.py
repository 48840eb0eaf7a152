"""How fast a million rows of conditions are, measured against what numpy needs for the bare powers.

Run as a script. Times differ from machine to machine; the ratios, taken in one run on the same data, hold. The floor is
the least that such a computation needs: three powers (station pressure takes two, density altitude one) and one
exponential (vapour pressure), each on all the rows at once. Where numpy has the processor's widest vectors for powers
(AVX-512) the floor falls by four, and reading and writing the columns weighs more: the ratio is higher there, the time
lower.
"""

import statistics
import time
from collections.abc import Callable

import numpy as np

from airfield_board.configuration.model import Instruments
from airfield_board.observations.conditions import conditions_of

ROWS = 1_000_000
REPEATS = 7
GOAL = 2.0
"""Most that the values alone may take, as a multiple of the floor."""


def measure() -> dict[str, float]:
    """Return seconds: ``floor``, ``values``, ``values and uncertainty``; medians of alternating runs."""
    rng = np.random.default_rng(20260714)
    altimeter_hpa = rng.uniform(980.0, 1040.0, ROWS)
    temperature_c = rng.uniform(-20.0, 45.0, ROWS)
    dewpoint_c = temperature_c - rng.uniform(0.0, 20.0, ROWS)
    of_instrument_c = np.full(ROWS, np.nan)
    instruments = Instruments(
        altimeter_resolution_hpa=0.34,
        altimeter_accuracy_hpa=0.68,
        temperature_resolution_c=0.1,
        temperature_accuracy_c=0.5,
        dewpoint_resolution_c=0.1,
        dewpoint_accuracy_c=1.0,
    )
    ratio = altimeter_hpa / 1013.25
    exponent = dewpoint_c / 20.0

    def floor() -> None:
        np.power(ratio, 0.1902631)
        np.power(ratio, 5.2558797)
        np.power(ratio, 0.2349690)
        np.exp(exponent)

    def values() -> None:
        conditions_of(altimeter_hpa, temperature_c, dewpoint_c, of_instrument_c, of_instrument_c, 1255.8, None)

    def values_and_uncertainty() -> None:
        conditions_of(altimeter_hpa, temperature_c, dewpoint_c, of_instrument_c, of_instrument_c, 1255.8, instruments)

    steps = {"floor": floor, "values": values, "values and uncertainty": values_and_uncertainty}
    taken_s: dict[str, list[float]] = {name: [] for name in steps}
    for _ in range(REPEATS):
        for name, step in steps.items():
            taken_s[name].append(_seconds(step))
    return {name: statistics.median(each) for name, each in taken_s.items()}


def _seconds(step: Callable[[], None]) -> float:
    began = time.perf_counter()
    step()
    return time.perf_counter() - began


def main() -> int:
    """Print the medians and the ratios; return 0 where the goal is met, else 1."""
    median_s = measure()
    for name, seconds in median_s.items():
        print(f"{name:24}{seconds * 1e3:8.1f} ms{seconds / median_s['floor']:8.2f} x floor")
    met = median_s["values"] <= GOAL * median_s["floor"]
    print(f"goal for the values, at most {GOAL:g} x: {'met' if met else 'not met'}")
    return 0 if met else 1


if __name__ == "__main__":
    raise SystemExit(main())
