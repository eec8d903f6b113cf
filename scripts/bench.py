"""Measures seams and pieces on named forms: prints tables, writes JSON and, when asked, a page of pictures.

    python3 scripts/bench.py                                            # the seam stage, each form once
    python3 scripts/bench.py --points 5000,20000,80000,320000           # ... and how it grows; about an hour
    python3 scripts/bench.py --seeds 64                                 # scores against the best of many; hours
    python3 scripts/bench.py --rivals                                   # against partitions and trees of equal length
    python3 scripts/bench.py --edges                                    # along edges against through faces
    python3 scripts/bench.py --goods felt,canvas --comfort 0 --picture  # the whole cover; `--goods all` for every goods

What is asked for is measured and nothing else. The unit of time is one factorisation of the form's own cotangent Laplacian,
measured in the same run; BLAS runs one thread.
"""

import argparse
import json
import os
import sys
from dataclasses import asdict

import setup

OUT = setup.ROOT / "out" / "bench"
THRIFTS = [0.03, 0.1, 0.3]  # from many pieces to few, where several are compared


def several(kind):
    """Function that reads words with commas between as a list of `kind`."""
    def read(words):
        return [kind(word.strip()) for word in words.split(",")]

    return read


def parser():
    """The bench's options."""
    import gallery

    options = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    options.add_argument("--forms", default=list(gallery.FORMS), type=several(str), help="names, comma between")
    options.add_argument("--points", default=[5000], type=several(int), help="about how many points; several, comma between")
    options.add_argument("--thrift", default=[], type=several(float),
                         help="prices of seam, comma between; the seam stage is measured at each (plain: at 0.1)")
    options.add_argument("--seeds", type=int, help="score of the seam stage over the best of so many seeds, at --thrift "
                         "or three of them")
    options.add_argument("--rivals", action="store_true", help="distortion at equal seam length against other ways to seam")
    options.add_argument("--edges", action="store_true", help="the seam stage along edges against through faces")
    options.add_argument("--slim", action="store_true", help="laying a piece flat, against libigl's SLIM")
    options.add_argument("--symmetry", default="auto", choices=("auto", "none"))
    options.add_argument("--goods", default=[], type=several(str), help="goods to cover in, comma between, or all")
    options.add_argument("--comfort", default=0.5, type=float)
    options.add_argument("--route", default="through", choices=("through", "edges"), help="of the cover")
    options.add_argument("--picture", action="store_true", help="also a page with every form, front and back, seams and u")
    return options


def wanted(options):
    """List of (table, its rows) for what the options ask for; rows yield (Row, Pattern or None)."""
    import seamwright as sw
    from tables import against, best, edges, fits, slim, stage

    goods = list(sw.goods()) if options.goods == ["all"] else options.goods
    asked = []
    compared = options.seeds or options.rivals or options.slim or options.edges
    if options.rivals:
        asked.append((against, against.rows(options.forms, options.points, options.thrift or THRIFTS)))
    if options.edges:
        asked.append((edges, edges.rows(options.forms, options.points, options.thrift or [0.1])))
    if options.slim:
        asked.append((slim, slim.rows(options.forms, options.points)))
    if options.seeds:
        asked.append((best, best.rows(options.forms, options.points, options.thrift or THRIFTS, options.seeds)))
    if not compared and (options.thrift or not goods):
        asked.append((stage, stage.rows(options.forms, options.points, options.thrift or [0.1], options.symmetry)))
    if goods:
        asked.append((fits, fits.rows(options.forms, options.points, goods, options.comfort, options.route)))
    return asked


def main(arguments):
    """Exit status: 0 when all was measured."""
    import gallery

    options = parser().parse_args(arguments)
    unknown = [name for name in options.forms if name not in gallery.FORMS]
    if unknown:
        parser().error(f"no form is called {', '.join(unknown)}; there are {', '.join(gallery.FORMS)}")
    shown, found = [], {}
    for table, rows in wanted(options):
        measured = found[table.__name__.split(".")[-1]] = []
        print(table.HEAD, flush=True)
        for row, pattern in rows:
            measured.append(row)
            print(table.line(row), flush=True)
            if options.picture and pattern is not None:
                shown.append((f"{table.HEAD}\n{table.line(row)}", pattern))
        print(*table.summary(measured), sep="\n", flush=True)
    OUT.mkdir(parents=True, exist_ok=True)
    plain = {name: [asdict(row) for row in rows] for name, rows in found.items()}
    (OUT / "bench.json").write_text(json.dumps(plain, indent=1) + "\n")
    if options.picture:
        import portraits

        print(f"Look at {portraits.page(OUT, shown)}")
    return 0


if __name__ == "__main__":
    setup.enter(__file__)
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    sys.exit(main(sys.argv[1:]))
