"""Which received value each exclusion means: by file, line and the text that stands there."""

from collections.abc import Sequence
from pathlib import PurePosixPath

from assayfolio.errors import DataError, Fault
from assayfolio.observations.faults import listed
from assayfolio.observations.values import RawFile
from assayfolio.study.exclusions import Exclusion
from assayfolio.study.faults import shown

_SHIFTED = "rows may have moved since the exclusion was decided; compare file and line, and decide again"


class ExclusionMatch:
    """The exclusions of a study, held against the values as they are received."""

    def __init__(self, exclusions: Sequence[Exclusion], files: Sequence[RawFile]) -> None:
        self._files = files
        self._faults: list[Fault] = []
        self._at: dict[tuple[int, int], list[Exclusion]] = {}
        self._hits: dict[Exclusion, int] = {}
        self._seen: dict[tuple[int, int], list[str]] = {}
        taken: dict[tuple[int, int, str], Exclusion] = {}
        for exclusion in exclusions:
            file = self._file_of(exclusion)
            if file is None:
                continue
            earlier = taken.setdefault((file, exclusion.row, exclusion.value.strip()), exclusion)
            if earlier is not exclusion:
                found = f"row {exclusion.row} is excluded a second time"
                advice = f"the first is at {earlier.place}; keep one of the two"
                self._faults.append(Fault(exclusion.place, found, advice))
                continue
            self._at.setdefault((file, exclusion.row), []).append(exclusion)
            self._hits[exclusion] = 0

    @property
    def any(self) -> bool:
        """Whether there is an exclusion at all."""
        return bool(self._at)

    def of(self, file: int, line: int, text: str) -> Exclusion | None:
        """The exclusion that means the value `text` on this line of this file, or None."""
        here = self._at.get((file, line))
        if here is None:
            return None
        self._seen.setdefault((file, line), []).append(text)
        for exclusion in here:
            if exclusion.value.strip() == text.strip():
                self._hits[exclusion] += 1
                return exclusion
        return None

    def require_each(self) -> None:
        """Raise DataError unless every exclusion meant exactly one of the values that were received."""
        faults = list(self._faults)
        for place, exclusions in self._at.items():
            faults.extend(
                self._fault(exclusion, place) for exclusion in exclusions if self._hits[exclusion] != 1
            )
        if faults:
            faults.sort(key=lambda fault: (fault.place.line or 0, fault.place.column or 0))
            file = faults[0].place.file
            noun = "fault" if len(faults) == 1 else "faults"
            raise DataError(f"{file} cannot be used: {len(faults)} {noun}", tuple(faults))

    def _fault(self, exclusion: Exclusion, place: tuple[int, int]) -> Fault:
        where = f"line {place[1]} of {self._files[place[0]].file}"
        if self._hits[exclusion] > 1:
            found = f"{where} holds {shown(exclusion.value)} {self._hits[exclusion]} times"
            return Fault(
                exclusion.place, found, "it cannot be told which of them is meant; nothing was excluded"
            )
        texts = self._seen.get(place)
        if texts is None:
            return Fault(exclusion.place, f"{where} has no value", _SHIFTED)
        found = f"{where} holds {listed(texts)}, the exclusion says {shown(exclusion.value)}"
        return Fault(exclusion.place, found, _SHIFTED)

    def _file_of(self, exclusion: Exclusion) -> int | None:
        """The position of the file that the exclusion names; None, with a fault kept, where there is none."""
        if exclusion.file is None:
            if len(self._files) == 1:
                return 0
            found = f"the study has {len(self._files)} data files, and the exclusion names none"
            self._faults.append(Fault(exclusion.place, found, f"state `file:`, one of {self._names()}"))
            return None
        named = PurePosixPath(exclusion.file).parts
        fitting = [
            at
            for at, file in enumerate(self._files)
            if PurePosixPath(file.file).parts[-len(named) :] == named
        ]
        if len(fitting) != 1:
            how = "is not a data file of the study" if not fitting else "could be several data files"
            found = f"{shown(exclusion.file)} {how}"
            self._faults.append(Fault(exclusion.place, found, f"the study has {self._names()}"))
            return None
        return fitting[0]

    def _names(self) -> str:
        return listed([file.file for file in self._files])
