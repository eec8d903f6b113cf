"""Measures seams on named forms: prints a table, writes JSON and, when asked, a page of pictures.

    python3 scripts/bench.py
    python3 scripts/bench.py --forms ball,glove --points 20000 --thrift 0.1 --goods felt,canvas --picture

Rows with goods run the whole cover; rows with a thrift run the seam stage, its starts included, and leave the rest of the
pattern out of the time. Time is processor time; its unit is one factorisation of the form's own cotangent Laplacian,
measured in the same run.
"""

import argparse
import json
import os
import statistics
import sys
import time
from dataclasses import asdict, dataclass

import setup

OUT = setup.ROOT / "out" / "bench"


@dataclass
class Row:
    """One line of the table."""

    form: str
    points: int
    wish: str
    seconds: float
    factorisations: float
    score: float | None
    pieces: int
    metres: float
    fits: bool
    refused: list
    measures: dict


def one_factorisation(surface, repeats=3):
    """Seconds that the sparse factors of a surface's cotangent Laplacian take, the middle of some repeats."""
    from scipy.sparse import diags_array
    from seamwright.form.laplacian import Factor, cotangent_laplacian
    from seamwright.form.measure import vertex_areas

    matrix = (cotangent_laplacian(surface) + 1e-6 * diags_array(vertex_areas(surface))).tocsc()
    times = []
    for _ in range(repeats):
        begin = time.process_time()
        Factor(matrix)
        times.append(time.process_time() - begin)
    return statistics.median(times)


def seam_stage(form, thrift):
    """(seconds, score) of the seam stage alone at a thrift."""
    from seamwright.seams.ladder import Ladder
    from seamwright.seams.seek import seek

    begin = time.process_time()
    found = seek(Ladder(form.surface), thrift)
    return time.process_time() - begin, found.score


def bench(name, count, unit, wishes):
    """(Row, Pattern) for a form of the gallery; unit: cache of factorisation times."""
    import gallery
    import numpy as np
    import seamwright as sw
    from seamwright.seams.refuse import measured

    form = sw.Form(*gallery.FORMS[name](count), name=name)
    if name not in unit:
        unit[name] = one_factorisation(form.surface)
    begin, score = time.process_time(), None
    pattern = sw.cover(form, sw.Wishes(**wishes))
    seconds = time.process_time() - begin
    if "thrift" in wishes:
        seconds, score = seam_stage(form, wishes["thrift"])
    metres = sum(np.linalg.norm(np.diff(seam.path, axis=0), axis=1).sum() for seam in pattern.seams if not seam.open)
    measures = measured(pattern)
    wish = f"thrift {wishes['thrift']:g}" if "thrift" in wishes else pattern.goods.name
    row = Row(name, len(form.points), wish, seconds, seconds / unit[name], score, len(pattern.pieces), float(metres),
              pattern.fits, [m.name for m in measures if m.refused],
              {m.name: m.value if np.isfinite(m.value) else None for m in measures})
    return row, pattern


HEAD = (f"{'form':12} {'points':>7} {'wish':18} {'seconds':>8} {'factor.':>8} {'score':>7} {'pieces':>6} {'metres':>7} "
        f"{'fits':4} refused")


def line(row):
    """The row as printed."""
    score = "" if row.score is None else f"{row.score:.3f}"
    return (f"{row.form:12} {row.points:7d} {row.wish:18} {row.seconds:8.2f} {row.factorisations:8.1f} {score:>7} "
            f"{row.pieces:6d} {row.metres:7.2f} {'yes' if row.fits else 'NO':4} {', '.join(row.refused)}")


def numbers(words):
    """List of the numbers in words with commas between."""
    return [float(word) for word in words.split(",")]


def main(arguments):
    """Exit status: 0 when all was measured."""
    import gallery

    parser = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    parser.add_argument("--forms", default=",".join(gallery.FORMS), help="names, comma between")
    parser.add_argument("--points", type=int, default=5000, help="about how many points each form has")
    parser.add_argument("--goods", default="", help="names, comma between: the cheapest network that fits (default: felt)")
    parser.add_argument("--thrift", default=[], type=numbers, help="numbers, comma between: the network for a price of seam")
    parser.add_argument("--route", default="through", choices=("through", "edges"))
    parser.add_argument("--picture", action="store_true", help="also a page with every form, front and back")
    options = parser.parse_args(arguments)
    names = [name.strip() for name in options.forms.split(",")]
    unknown = [name for name in names if name not in gallery.FORMS]
    if unknown:
        parser.error(f"no form is called {', '.join(unknown)}; there are {', '.join(gallery.FORMS)}")
    wishes = [{"goods": "spandex", "thrift": thrift} for thrift in options.thrift]
    wishes += [{"goods": word.strip()} for word in options.goods.split(",") if word]
    rows, shown, unit = [], [], {}
    print(HEAD, flush=True)
    for wish in wishes or [{"goods": "felt"}]:
        for name in names:
            row, pattern = bench(name, options.points, unit, {**wish, "route": options.route})
            rows.append(row)
            print(line(row), flush=True)
            shown.append((line(row), pattern))
    for wish in dict.fromkeys(row.wish for row in rows):
        ours = [row for row in rows if row.wish == wish]
        taken = [row.factorisations for row in ours]
        bad = sum(bool(row.refused) for row in ours)
        print(f"{wish}: median {statistics.median(taken):.1f} factorisations, most {max(taken):.1f}; "
              f"{bad} of {len(ours)} with something to refuse")
    OUT.mkdir(parents=True, exist_ok=True)
    (OUT / "bench.json").write_text(json.dumps([asdict(row) for row in rows], indent=1) + "\n")
    if options.picture:
        import portraits

        print(f"Look at {portraits.page(OUT, shown)}")
    return 0


if __name__ == "__main__":
    setup.enter(__file__)
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    sys.exit(main(sys.argv[1:]))
