"""Whether the rules of named subsets still give their trials; the first channel."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.core.rule import rule_mask
from phasebrush.core.sort_keys import KINDS, same_key
from phasebrush.model.members import members_of
from phasebrush.model.subset import Subset

if TYPE_CHECKING:
    from phasebrush.core.rule import Rule
    from phasebrush.core.trials import Trials
    from phasebrush.model.results import KeyValues
    from phasebrush.model.state import State


def check_rules(state: State, trials: Trials, key: KeyValues | None) -> dict[str, str]:
    """Say of each named subset of the recording whether its rule still gives its trials."""
    used = ~state.excluded.mask_of(len(trials))
    found = {}
    for named in state.named:
        rule = named.members.rule
        if named.recording != state.recording or rule is None:
            continue
        if rule.key is not None and not _rule_can_be_checked(rule, state, key):
            found[named.name] = "another key or channel"
            continue
        values = key.values if key is not None and rule.key is not None else None
        given = members_of(Subset(rule_mask(rule, values, trials.labels, used)), trials).who
        same = given == named.members.who
        found[named.name] = "same trials" if same else "gives other trials now"
    return found


def _rule_can_be_checked(rule: Rule, state: State, key: KeyValues | None) -> bool:
    here = rule.channel == state.channel and same_key(rule.key, state.key)
    if key is None or key.fault or not here:
        return False
    return not KINDS[state.key.kind].uses_spot or rule.spot == state.spot


def default_channel(trials: Trials, wished: str = "") -> str:
    """The wished channel where it exists; else a midline site at the back; else the first."""
    for name in (wished, "Oz", "POz", "Pz", "Cz"):
        if name in trials.ch_names:
            return name
    return trials.ch_names[0]
