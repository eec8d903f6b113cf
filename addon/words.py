"""Results in words, the same in the window and on the command line."""

STRAINED = "strained"


def of_pattern(summary):
    """'4 pieces of canvas, 3.20 m of seam, none strained', from a pattern's summary."""
    count = len(summary["pieces"])
    strained = [piece["name"] for piece in summary["pieces"] if piece["fit"] == STRAINED]
    pieces = f"{count} {'piece' if count == 1 else 'pieces'} of {summary['goods']['name']}"
    verdict = f"strained: {', '.join(strained)}" if strained else "none strained"
    return f"{pieces}, {summary['seam_metres']:.2f} m of seam, {verdict}"


def of_forms(forms):
    """One line a form; what a check says comes a line each below it."""
    lines = []
    for form in forms:
        if "says" in form:
            lines.append(f"{form['object']}: {'can' if form['sound'] else 'cannot'} be covered")
            lines += [f"    {line}" for line in form["says"]]
        else:
            lines.append(form.get("error") or f"{form['object']}: {of_pattern(form)}")
    return "".join(line + "\n" for line in lines)


def of_goods(goods):
    """A table of the goods: limits comfortable/hard in percent."""
    lines = [f"{'goods':20}{'warp %':>12}{'weft %':>12}{'ease in %':>12}{'width mm':>10}"]
    for each in goods:
        pairs = ("/".join(f"{100 * value:g}" for value in each[key]) for key in ("stretch_warp", "stretch_weft", "ease_in"))
        lines.append(f"{each['name']:20}" + "".join(f"{pair:>12}" for pair in pairs) + f"{1000 * each['width']:10.0f}")
    return "".join(line + "\n" for line in lines)
