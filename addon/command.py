"""Does what the command line asks for. Each command returns (plain data for JSON, exit status)."""

import sys
import time
from dataclasses import asdict
from pathlib import Path

import bpy

from . import index, scenes, target, words, worker
from .job import Job, JobError
from .operators.check import sentences
from .scenes import WrongUse

TICK = 0.05


def goods(asked):
    """The built-in goods and their limits."""
    import seamwright as sw

    return {"goods": [asdict(each) for each in sw.goods().values()]}, 0


def check(asked):
    """The form check of every form."""
    found = []
    for thing, file in _forms(asked):
        sound, lines = sentences(_read(thing))
        found.append({"object": thing.name, "file": file, "sound": sound, "says": lines})
    return {"forms": found}, 0 if all(form["sound"] for form in found) else 3


def cover(asked):
    """Cover every form, write its sheets, and the summary and index of all."""
    from seamwright.sheets import safe_name

    wishes = _overrides(asked)
    if asked.workers < 1:
        raise WrongUse(f"--workers {asked.workers}: give a whole number of at least 1.")
    if asked.save and len(scenes.sort(asked.files)[0]) > 1:
        raise WrongUse("--save writes one scene: give one .blend at a time with it.")
    out = Path(asked.out).absolute()
    waiting, answers = [], []
    for thing, file in _forms(asked):
        folder = safe_name(thing.name, [before["folder"] for before in answers])
        answer = {"object": thing.name, "file": file, "folder": folder}
        answers.append(answer)
        mine = {**target.group(thing).wishes.asked(), **wishes}
        save = {"folder": str(out / folder), "kinds": asked.kinds, "paper": asked.paper}
        try:
            target.check(thing, mine, bpy.context.evaluated_depsgraph_get())
            waiting.append((answer, _read(thing), mine, save))
        except target.Refused as refused:
            _fail(answer, refused)
    for answer, job in _run(waiting, asked.workers):
        try:
            pattern = job.pattern()
        except JobError as error:
            _fail(answer, error)
            continue
        answer["files"] = sorted(path.name for path in (out / answer["folder"]).iterdir() if path.is_file())
        answer.update(pattern.summary())
        _say(f"{answer['object']}: {words.of_pattern(answer)}")
        if asked.save:
            target.lay_in(bpy.data.objects[answer["object"]], pattern, job.path, job.asked, bpy.context.scene)
    if asked.save:
        bpy.ops.wm.save_as_mainfile(filepath=str(Path(asked.save).absolute()), copy=True)
    failed = any("error" in answer for answer in answers)
    result = {"fits": not failed and all(answer["fits"] for answer in answers), "forms": answers}
    index.write(out, result)
    return result, 3 if failed else 0 if result["fits"] else 1


def _overrides(asked):
    """The wishes that options set. Raises WrongUse where one cannot be."""
    from seamwright import WishError
    from seamwright.fit.goods import get

    wishes = {key: getattr(asked, key) for key in ("comfort", "thrift", "route") if getattr(asked, key) is not None}
    if asked.goods is not None:
        own = asked.goods.lower().endswith(".toml")
        wishes.update({"own_goods": str(Path(asked.goods).absolute())} if own else {"goods": asked.goods, "own_goods": None})
    try:
        get(worker.wishes_of(wishes).goods)
    except WishError as error:
        raise WrongUse(str(error)) from error
    return wishes


def _forms(asked):
    """Yield (object, file name or None) of the forms asked for; the object is only good until the next one is asked for."""
    if not asked.files and not bpy.data.filepath:
        raise WrongUse("name a FILE, or open a .blend before the command.")
    missing, count = set(asked.object or ()), 0
    for things, file in _sources(asked.files):
        for thing in things:
            if not asked.object or thing.name in asked.object:
                missing.discard(thing.name)
                count += 1
                yield thing, file
    if missing:
        raise WrongUse(f"no object that could be covered is named {', '.join(sorted(map(repr, missing)))}.")
    if not count:
        raise WrongUse("there is no visible mesh object with faces.")


def _sources(files):
    """Yield (forms, file name): of each .blend, or the open scene, and of each file imported into it."""
    blends, others = scenes.sort(files)
    for blend in blends:
        scenes.open_blend(blend)
        yield scenes.forms(), str(blend)
    if not files:
        yield scenes.forms(), bpy.data.filepath
    elif not blends and not bpy.data.filepath:
        scenes.empty()
    for other in others:
        yield scenes.in_order(filter(target.is_form, scenes.bring_in(other))), str(other)


def _read(thing):
    return target.read_form(thing, bpy.context.scene, bpy.context.evaluated_depsgraph_get())


def _run(waiting, workers):
    """Yield (answer, ended Job) for each of `waiting`, with as many as `workers` at a time."""
    waiting, running = list(waiting), []
    try:
        while waiting or running:
            while waiting and len(running) < workers:
                answer, *rest = waiting.pop(0)
                running.append((answer, Job(*rest)))
            for answer, job in list(running):
                before = job.words
                alive = job.running()
                if job.words != before:
                    _say(f"{answer['object']}: {job.words} ({100 * job.share:.0f} %)")
                if not alive:
                    running.remove((answer, job))
                    yield answer, job
            time.sleep(TICK)
    finally:
        for _, job in running:
            job.stop()


def _fail(answer, error):
    answer["error"] = str(error)
    _say(str(error))


def _say(text):
    print(text, file=sys.stderr, flush=True)
