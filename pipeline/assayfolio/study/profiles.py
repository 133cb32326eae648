"""The shipped profiles: the settings that a `profile:` in `lab.yaml` stands for.

`regulated` is for a laboratory whose records are inspected under rules for electronic records, such as
21 CFR Part 11, Annex 11 of the EU guide to good manufacturing practice, or the principles of good laboratory
practice (from memory). It asks for everything that such a record has to name, for a plan that is registered
and approved before the data, for persons with roles and for a witness of the trail; it logs reading; and it
keeps every separation of duties.
"""

from collections.abc import Mapping
from dataclasses import dataclass

from assayfolio.study.laboratory import LaboratoryRequirement, Profile
from assayfolio.study.vocabulary import Requirement

REGULATED: tuple[Requirement | LaboratoryRequirement, ...] = (
    "unit",
    "levels",
    "replicates",
    "measurand",
    "method",
    "item",
    "lot",
    "instrument",
    "operator",
    "measured-at",
    "purpose",
    "margin-source",
    "checks",
    "power",
    "sign-off",
    "pre-registration",
    "approved-protocol",
    "people",
    "witness",
)


@dataclass(frozen=True, slots=True)
class ProfileSettings:
    """What a profile requires, and the settings that it fixes by their names in `lab.yaml`."""

    require: tuple[str, ...]
    fixed: Mapping[str, bool]


PROFILE_SETTINGS: Mapping[Profile, ProfileSettings] = {
    "regulated": ProfileSettings(
        REGULATED,
        {
            "one-person": False,
            "log-reading": True,
            "review-before-approval": True,
            "separation.reviewer-is-not-runner": True,
            "separation.approver-is-not-author": True,
        },
    )
}
