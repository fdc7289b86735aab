"""The sources of the methods, as the list of references gives them."""

from __future__ import annotations

from enum import StrEnum
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable


class Source(StrEnum):
    """A source; its value is how a reference list gives it.

    Authors, years and pages stand beside the definitions in ``core`` that follow them.
    """

    BENJAMINI = "Benjamini & Hochberg 1995, J R Stat Soc B 57:289–300"
    COHEN = "Cohen 2019, NeuroImage 199:81–86"
    EFRON = "Efron & Tibshirani 1993, An Introduction to the Bootstrap"
    FISHER = "Fisher 1993, Statistical Analysis of Circular Data"
    KEIL = "Keil et al. 2014, Psychophysiology 51:1–21"
    KENDALL = "Kendall 1974, J R Stat Soc B 36:365–417"
    MACKINNON = "MacKinnon & White 1985, J Econometrics 29:305–325"
    MARDIA = "Mardia & Jupp 2000, Directional Statistics"
    MARIS = "Maris & Oostenveld 2007, J Neurosci Methods 164:177–190"
    PERNET = "Pernet et al. 2020, Nat Neurosci 23:1473–1483"
    PHIPSON = "Phipson & Smyth 2010, Stat Appl Genet Mol Biol 9:39"
    SASSENHAGEN = "Sassenhagen & Draschkow 2019, Psychophysiology 56:e13335"
    TALLON_BAUDRY = "Tallon-Baudry et al. 1996, J Neurosci 16:4240–4249"
    VINCK = "Vinck et al. 2010, NeuroImage 51:112–122"
    WIDMANN = "Widmann et al. 2015, J Neurosci Methods 250:34–46"
    WILKIE = "Wilkie 1983, Appl Statist 32:311–312"
    ZAR = "Zar 2010, Biostatistical Analysis"

    @property
    def short(self) -> str:
        """Authors and year, as the running text names it."""
        return self.value.split(",", maxsplit=1)[0]


def cited(*sources: Source) -> str:
    """Sources in brackets, as the running text names them."""
    return f"({'; '.join(source.short for source in sources)})"


def used_sources(words: str) -> tuple[Source, ...]:
    """The sources that a text names, in alphabetical order."""
    return tuple(source for source in sorted(Source) if source.short in words)


def reference_list(sources: Iterable[Source]) -> str:
    """A line a source."""
    return "\n".join(source.value for source in sources)
