"""Write us_macro.csv from the United States macroeconomic data that statsmodels carries.

Run ``python configs/data/make_us_macro.py``; the file is written beside this script, or
into the folder given as the only argument.

Source
    ``statsmodels.datasets.macrodata``, 1959Q1 to 2009Q3, compiled by Skipper Seabold from
    FRED (Federal Reserve Bank of St. Louis) and the Bureau of Labor Statistics, both
    accessed by him on 15 December 2009.
Licence
    Public domain, as the data set itself says.

Columns
    date              quarter, 1959-Q1
    inflation         400 ln(P_t / P_t-1), per cent a year, P the consumer price index
    unemployment      seasonally adjusted unemployment rate, per cent
    bill_rate         three-month treasury bill, secondary market, per cent a year
    consumer_prices   consumer price index at the end of the quarter, 1982-84 = 100
    money             M1 at the end of the quarter, thousand million dollars

The source fills inflation of its first quarter with a zero because the price index of the
quarter before is not in the file.  That zero is no observation, so the cell stays empty.
"""

from __future__ import annotations

import csv
import sys
from pathlib import Path

from statsmodels.datasets import macrodata

COLUMNS = {
    "inflation": "infl",
    "unemployment": "unemp",
    "bill_rate": "tbilrate",
    "consumer_prices": "cpi",
    "money": "m1",
}
FIRST_QUARTER = (1959, 1)


def write(folder: Path) -> Path:
    """Write us_macro.csv into a folder and return its path."""
    rows = macrodata.load_pandas().data
    path = folder / "us_macro.csv"
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(["date", *COLUMNS])
        for row in rows.to_dict("records"):
            quarter = (int(row["year"]), int(row["quarter"]))
            values = {name: repr(float(row[column])) for name, column in COLUMNS.items()}
            if quarter == FIRST_QUARTER:
                values["inflation"] = ""
            writer.writerow([f"{quarter[0]}-Q{quarter[1]}", *values.values()])
    return path


if __name__ == "__main__":
    target = Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent
    print(write(target))
