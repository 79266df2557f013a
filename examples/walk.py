"""A walk through the program from Python: a candidate, its properties, a frame, a figure, a ranking.

python examples/walk.py [FOLDER]

With a folder, two figures are written into it, and what they show is said in words.
"""

import sys
from pathlib import Path

import numpy as np

import legwright as lw
from legwright.decide.brief import load_brief
from legwright.decide.rank import rank
from legwright.show import drawings, figures, records

BRIEF = Path(__file__).with_name("enamel-furnace.toml")


def main(folder: str | None = None) -> None:
    """Rank a brief, print properties of its best candidate, and draw both."""
    job = load_brief(BRIEF)
    rows = rank(job, BRIEF)

    best = rows[0].candidate
    made = lw.evaluate(best, np.linspace(job.duty.cold_K, job.duty.hot_K, 5), rows[0].doping, rows[0].size)
    frame = made.to_frame()[["temperature [K]", "seebeck [uV/K]", "electrical conductivity [S/m]", "zT [1]"]]

    print(f"{best.name} at its best size and doping for: {job.title}")
    print(frame.round(3).to_string(index=False))

    if folder is None:
        return
    drawn = {
        "ranking": drawings.ranking_record(job.title, [records.rank_record(row) for row in rows]),
        "size": drawings.size_record(drawings.design_in(job, rows[0]), draws=128, seed=0),
    }
    for name, record in drawn.items():
        picture = figures.picture(record)
        Path(folder, f"{name}.svg").write_text(figures.as_svg(picture, name), encoding="utf-8")
        print(picture.alt)


if __name__ == "__main__":
    main(*sys.argv[1:2])
