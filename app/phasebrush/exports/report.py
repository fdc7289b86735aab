"""The session report: one HTML file that needs nothing else."""

from __future__ import annotations

import base64
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush.caution import CAUTION
from phasebrush.exports.markup import html_table, paragraphs, safe, section
from phasebrush.exports.report_numbers import comparisons_part, recipe_text, spot_part
from phasebrush.figures.caption import caption
from phasebrush.figures.save import page_bytes
from phasebrush.look.tokens import LIGHT
from phasebrush.model.methods.wording import chosen_how, counted, listed, number, span
from phasebrush.model.methods_text import methods_text
from phasebrush.model.pages import Page
from phasebrush.model.state import LETTERS

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from phasebrush.core.trials import Trials
    from phasebrush.model.results import Snapshot

STYLE = f"""
:root {{ color-scheme: light; }}
body {{ margin: 0 auto; max-width: 62rem; padding: 2rem 1.5rem; background: {LIGHT.panel};
  color: {LIGHT.text}; font: 16px/1.5 system-ui, sans-serif; }}
h1 {{ font-size: 1.5rem; font-weight: 600; margin: 0; }}
h2 {{ font-size: 1.1rem; font-weight: 600; margin: 2rem 0 .5rem; padding-top: .75rem;
  border-top: 1px solid {LIGHT.hairline}; }}
.muted {{ color: {LIGHT.muted}; }}
.scroll {{ overflow-x: auto; }}
table {{ border-collapse: collapse; font-variant-numeric: tabular-nums; font-size: .9rem; }}
th, td {{ padding: .25rem .75rem .25rem 0; text-align: left; vertical-align: top; }}
th {{ color: {LIGHT.muted}; font-weight: 500; }}
td.number, th.number {{ text-align: right; }}
tr + tr td {{ border-top: 1px solid {LIGHT.hairline}; }}
figure {{ margin: 0; }} img {{ max-width: 100%; height: auto; }}
figcaption {{ font-size: .85rem; margin-top: .5rem; }}
pre {{ white-space: pre-wrap; overflow-wrap: anywhere; font-size: .75rem; color: {LIGHT.muted}; }}
.caution {{ border-left: 3px solid {LIGHT.caution}; padding-left: .75rem; }}
@media print {{ body {{ max-width: none; padding: 0; font-size: 10pt; }}
  figure, tr {{ break-inside: avoid; }} h2, h2 + p {{ break-after: avoid; }}
  .scroll {{ overflow: visible; }} img {{ max-height: 21cm; }} }}
"""


def report_bytes(
    snapshot: Snapshot,
    page: Page,
    recipe: Mapping[str, Any],
    *,
    stopped: Callable[[], bool] | None = None,
) -> bytes:
    """Make the report of the recording on the table, as UTF-8 HTML.

    Pictures are in the file, there are no links out of it and no scripts. Every text is
    escaped. Neither a path nor a field of the header that names a person is in it; notes are
    the person's own words.

    Parameters
    ----------
    snapshot : Snapshot
        Record and results.
    page : Page
        Figure of the report.
    recipe : mapping
        How to get the numbers again.
    stopped : callable, optional
        Asked while the figure is drawn.

    Raises
    ------
    ValueError
        If no trials are on the table.
    JobStopped
        If ``stopped`` said True.
    """
    trials = snapshot.trials
    if trials is None:
        raise ValueError("no trials are on the table")
    title = f"Session report: {trials.source.title}"
    program = safe(f"Phasebrush {recipe['versions']['phasebrush']}")
    channel = safe(snapshot.state.channel)
    parts = [
        f"<h1>{safe(title)}</h1>",
        f'<p class="muted">{program}, channel {channel}</p>',
        f'<p class="caution">{safe(CAUTION)}</p>',
        section("Trials", _trials(snapshot, trials)),
        section("Figure", _figure(snapshot, page, stopped)),
        section("At the spot", spot_part(snapshot)),
        section("Tests of A against B", comparisons_part(snapshot)),
        section("Methods", paragraphs(methods_text(snapshot))),
        section("Notes", _notes(snapshot)),
        section("Recipe", f"<pre>{safe(recipe_text(recipe))}</pre>"),
    ]
    body = "\n".join(parts)
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<title>{safe(title)}</title>\n<style>{STYLE}</style>\n</head>\n<body>\n{body}\n"
        "</body>\n</html>\n"
    ).encode()


def _trials(snapshot: Snapshot, trials: Trials) -> str:
    """Cut, counts by label and subset, exclusions."""
    state, cut = snapshot.state, trials.cut
    n_trials = len(trials)
    excluded = state.excluded.mask_of(n_trials)
    baseline = "none" if cut.baseline_s is None else span(*cut.baseline_s, "s")
    rows = [
        ("trials", f"{n_trials}, of which {int(excluded.sum())} excluded"),
        ("labels", _labels(trials, ~excluded)),
        ("window", span(*trials.window_s, "s")),
        ("voltage baseline", baseline),
        ("sampling rate", f"{number(trials.sfreq_hz, 6)} Hz"),
        ("channels", f"{len(trials.ch_names)}"),
    ]
    for letter in LETTERS:
        subset = state.subset(letter)
        words = f"{counted(subset.n, 'trial')}, {chosen_how(subset)}" if subset.n else "empty"
        rows.append((letter, words))
    if excluded.any():
        out = [f"{trials.onsets_s[i]:.3f} s ({trials.labels[i]})" for i in np.flatnonzero(excluded)]
        rows.append(("excluded, by onset", listed(out)))
    rows += [("note of the reader", warning) for warning in trials.warnings]
    return html_table((), rows, words=2)


def _labels(trials: Trials, mask: np.ndarray[Any, np.dtype[np.bool_]]) -> str:
    names, counts = np.unique(np.array(trials.labels)[mask], return_counts=True)
    return listed([f"{n} {name}" for name, n in zip(names.tolist(), counts.tolist(), strict=True)])


def _figure(snapshot: Snapshot, page: Page, stopped: Callable[[], bool] | None) -> str:
    picture = base64.b64encode(page_bytes(snapshot, page, ".png", stopped=stopped)).decode("ascii")
    words = safe(caption(snapshot, page))
    return f'<figure><img alt="{words}" src="data:image/png;base64,{picture}"></figure>'


def _notes(snapshot: Snapshot) -> str:
    state = snapshot.state
    said = [paragraphs(state.note(state.recording))]
    said += [
        paragraphs(f"{named.name}: {named.note}")
        for named in state.named
        if named.recording == state.recording and named.note
    ]
    return "\n".join(part for part in said if part) or "<p>None.</p>"


REPORT_PAGE = Page(
    name="report", paper="double-column", columns=2, font_pt=7.0, dpi=200,
    panels=("average", "locking-map", "stack", "power-map", "locking-trace", "power-trace",
            "steps", "dial"),
)  # fmt: skip
"""The figure of a report where no page of its own is named."""
