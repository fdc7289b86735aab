"""The caution that every page, report and command carries."""

CAUTION = (
    "Research use only; not for diagnosis or patient care. Follow local ethics and "
    "data-protection rules."
)
