"""Write harbour.csv: invented monthly data in which the right answer is known.

Nothing here was observed anywhere.  The harbour, its freight, its rents and its diesel
price are drawn from the equations below with a fixed seed, so that a reader can see what a
sweep says when the truth is known.

Run ``python configs/data/make_harbour.py``; the file is written beside this script, or into
the folder given as the only argument.

The truth, in monthly log changes (d diesel, f freight, r rents; e are independent normal
shocks, s are seasonal patterns that add to zero over the year)::

    d_t = 0.30 d_t-1                                            + e_d   sd 0.030
    f_t = 0.25 f_t-1 - 0.60 d_t-1                    + s_f      + e_f   sd 0.020
    r_t = 0.30 r_t-1 - 0.25 d_t-2 + b_t (f_t-1 + f_t-2) + s_r   + e_r   sd 0.008

1. Freight leads rents, with a positive sign, only until December 2010: b_t = 0.12 until
   then and 0 from January 2011, when (so the story goes) leases were tied to an index.
2. Rents never lead freight.
3. Diesel drives both, freight after one month and rents after two.  Leave diesel out, or
   give it one lag only, and freight seems to lead rents from 2011 on as well.
4. Freight and rents have seasonal patterns.  The pattern of rents follows that of freight by
   two months, so that a regression without seasonal terms takes the calendar for a lead.
5. From March 2020 to June 2021 the quay is closed in turns: freight falls and recovers by
   large steps that have nothing to do with rents.

Levels grow a little besides (0.15 to 0.20 per cent a month), and are rounded as such
figures are printed.  Two further columns measure freight less well: tonnes carry noise of
their own, and the share of idle berths runs the other way (more freight, fewer idle berths).

Columns
    month           month, 1995-01 to 2024-12
    rents           warehouse rents, index, January 1995 about 100
    freight_teu     containers handled, twenty-foot equivalents
    freight_tonnes  weight handled, tonnes
    idle_berths     idle berths, per cent of berth days
    diesel          diesel price, cents a litre
"""

from __future__ import annotations

import csv
import sys
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

SEED = 20260423  # chosen for levels that look plausible; the truth above does not depend on it
FIRST_YEAR, YEARS = 1995, 30
MONTHS = 12 * YEARS
WARM_UP = 60  # months simulated before the first one that is written
LINK = 0.12
LINK_ENDS = 12 * (2011 - FIRST_YEAR)  # first month without the link: 2011-01
CLOSURE = 12 * (2020 - FIRST_YEAR) + 2  # 2020-03
CLOSURE_STEPS = np.array(  # log points, one for each month until 2021-06; they add to zero
    [-14, -9, -3, 6, 7, 4, -7, -6, 3, 6, 5, -4, 3, 5, 3, 1]
) / 100  # fmt: skip
FREIGHT_SEASON = (-4.0, -3.0, 1.0, 2.0, 2.5, 1.0, -1.0, -1.5, 2.0, 3.0, 1.0, -3.0)  # per cent


def changes() -> dict[str, NDArray[np.float64]]:
    """Simulate the monthly log changes, one array of MONTHS values for each series."""
    # RandomState's stream is frozen for ever, so every version of NumPy draws this file.
    shocks = np.random.RandomState(SEED).standard_normal((5, WARM_UP + MONTHS))
    freight_season = np.array(FREIGHT_SEASON) / 100
    rents_season = 0.4 * np.roll(freight_season, 2)
    diesel, freight, rents = np.zeros((3, WARM_UP + MONTHS))
    for t in range(2, WARM_UP + MONTHS):
        month = t - WARM_UP
        season = month % 12
        link = LINK if month < LINK_ENDS else 0.0
        diesel[t] = 0.30 * diesel[t - 1] + 0.030 * shocks[0, t]
        freight[t] = (
            0.25 * freight[t - 1]
            - 0.60 * diesel[t - 1]
            + freight_season[season]
            + 0.020 * shocks[1, t]
        )
        rents[t] = (
            0.30 * rents[t - 1]
            - 0.25 * diesel[t - 2]
            + link * (freight[t - 1] + freight[t - 2])
            + rents_season[season]
            + 0.008 * shocks[2, t]
        )
    diesel, freight, rents = diesel[WARM_UP:], freight[WARM_UP:], rents[WARM_UP:]
    # The closure comes on top of the freight equation: no lag of freight or rents feels it.
    freight[CLOSURE : CLOSURE + len(CLOSURE_STEPS)] += CLOSURE_STEPS
    return {
        "diesel": diesel,
        "freight": freight,
        "rents": rents,
        "weight_noise": shocks[3, WARM_UP:],
        "berth_noise": shocks[4, WARM_UP:],
    }


def levels() -> dict[str, list[str]]:
    """Turn the changes into levels with growth, rounded as such figures are printed."""
    change = changes()
    months = np.arange(MONTHS)
    freight = np.cumsum(change["freight"])
    teu = 40_000 * np.exp(0.0020 * months + freight)
    # Noise in the level of a measure is noise in a measure; it does not add up over time.
    tonnes = 9.5 * teu * np.exp(0.012 * change["weight_noise"])
    idle = 18.0 * np.exp(-1.2 * freight + 0.03 * change["berth_noise"])
    rents = 100 * np.exp(0.0015 * months + np.cumsum(change["rents"]))
    diesel = 70 * np.exp(0.0020 * months + np.cumsum(change["diesel"]))
    return {
        "month": [f"{FIRST_YEAR + m // 12}-{m % 12 + 1:02d}" for m in range(MONTHS)],
        "rents": [f"{value:.3f}" for value in rents],
        "freight_teu": [f"{value:.0f}" for value in teu],
        "freight_tonnes": [f"{value:.0f}" for value in tonnes],
        "idle_berths": [f"{value:.3f}" for value in idle],
        "diesel": [f"{value:.2f}" for value in diesel],
    }


def write(folder: Path) -> Path:
    """Write harbour.csv into a folder and return its path."""
    columns = levels()
    path = folder / "harbour.csv"
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(columns)
        writer.writerows(zip(*columns.values(), strict=True))
    return path


if __name__ == "__main__":
    target = Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent
    print(write(target))
