"""What merges cost, found many at a time, against one evaluation for each."""

import numpy as np
import pytest
from forms import ellipsoid, starfish, torus
from parted import fields_of_cells, level_of
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.energy import borders, evaluate
from seamwright.seams.flow import PIECE_PRICE, settle
from seamwright.seams.merging import Merging, joined, unions
from seamwright.seams.seek import simplify
from seamwright.seams.topology import regions

FORMS = {"egg": ellipsoid(1.0, 0.7, 0.5, 4), "torus": torus(1.0, 0.4, 60, 30), "starfish": starfish(40)}


@pytest.fixture(params=FORMS, name="start")
def any_start(request):
    level = level_of(FORMS[request.param])
    cut = cut_by_fields(level.surface, fields_of_cells(level, 9))
    return level, settle(level, cut, cut.labels, 0.1)


def test_borders_add_up_to_the_seams(start):
    level, found = start
    border = borders(level, found.cut)
    assert np.triu(border).sum() == pytest.approx(found.cost.length, rel=1e-12)
    assert (border == border.T).all() and not np.diag(border).any()


def test_every_union_is_a_disk(start):
    level, found = start
    roots = unions(level, found.cut.labels)
    assert len(roots) > 5
    for root in roots:
        labels = joined(found.cut.labels, root)
        assert labels.max() + 1 == found.count - 1
        assert (regions(level, labels).euler == 1).all()


def test_gains_match_an_evaluation_of_each_merge(start):
    level, found = start
    merging = Merging(level, 0.1, "square", found.count)
    for _ in range(3):  # merges keep what was learnt before them
        roots = unions(level, found.cut.labels)
        gains = merging.gains(found.cut, found.cost, roots)
        trials = [settle(level, found.cut, joined(found.cut.labels, root), 0.1) for root in roots]
        real = np.array([trial.cost.total - found.cost.total for trial in trials])
        assert np.abs(gains - real).max() < 0.03 * np.abs(real).max()  # a junction that becomes a bend is not foreseen
        best = int(np.argmin(gains))
        merging.merge(roots[best])
        found = trials[best]


def test_simplifying_ends_where_no_merge_pays(start):
    level, found = start
    few = simplify(level, found, 0.1)
    assert few.score < found.score and few.count >= 2
    for root in unions(level, few.cut.labels):
        if len(np.unique(root)) >= 2:
            after = evaluate(level, settle(level, few.cut, joined(few.cut.labels, root), 0.1).cut, 0.1, "square")
            assert after.total + PIECE_PRICE * len(np.unique(root)) >= few.score - 0.01
