"""The intake register: what the trail's entries say of raw data, and the state of every file."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.evidence.data_states import StandingFile, data_files
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.register import inputs_details, read_register, received_details

PLAN, OTHER_PLAN, LAB = "a1" * 32, "a2" * 32, "ff" * 32
IRON, ZINC, LEAD = "01" * 32, "02" * 32, "03" * 32
PATHS = {IRON: "configs/data/iron.csv", ZINC: "configs/data/zinc.csv", LEAD: "configs/data/lead.csv"}


class Trail:
    """Entries as the steps of a run make them, without files."""

    def __init__(self):
        self.entries = []

    def add(self, action, subject, **details):
        seq = len(self.entries) + 1
        moment = f"2026-03-02T08:{seq // 60:02d}:{seq % 60:02d}.000000Z"
        entry = TrailEntry(seq, moment, "m.berg", action, subject, None, details, "0" * 64)
        self.entries.append(entry)
        return entry

    def receive(self, digest, study="METAL-1"):
        self.add("received", study, step=1, **received_details(PATHS[digest], 40, digest, study))

    def inputs(self, plan, data, exclusions=None):
        inputs = {"configs/lab.yaml": LAB, "configs/metal.yaml": plan} | {PATHS[each]: each for each in data}
        named = None
        if exclusions is not None:
            named = "configs/data/exclusions.yaml"
            inputs[named] = exclusions
        return inputs_details(inputs, "configs/metal.yaml", named, [PATHS[each] for each in data])

    def run(self, *data, study="METAL-1", number=1, plan=PLAN, exclusions=None, ends=("sealed",)):
        subject = f"{study}/run-{number:04d}"
        known = read_register(self.entries).digests
        for digest in data:
            if digest not in known:
                self.receive(digest, study)
        self.add("allotted", subject, number=number, **self.inputs(plan, data, exclusions))
        for action in ends:
            self.add(action, subject)
        return subject

    def refuse(self, *data, study="METAL-1"):
        return self.add("refused", study, **self.inputs(PLAN, data))

    @property
    def register(self):
        return read_register(self.entries)


@pytest.fixture
def trail():
    return Trail()


def there(*digests, named=("METAL-1",)):
    return [StandingFile(PATHS[digest], 40, digest, named) for digest in digests]


def executions_of(trail, subject):
    return trail.register.executions(subject)


class TestFirstSeen:
    def test_a_file_is_known_by_the_entry_that_first_told_of_it(self, trail):
        trail.receive(IRON)
        trail.receive(IRON, "METAL-2")
        [file] = trail.register.received
        assert (file.path, file.size, file.seq, file.study) == (PATHS[IRON], 40, 1, "METAL-1")
        assert file.time == trail.entries[0].time

    @pytest.mark.parametrize(
        "details",
        [
            {},
            {"path": 7, "size": 1, "sha256": IRON, "study": None},
            {"path": "x", "size": True, "sha256": IRON, "study": None},
            {"path": "x", "size": -1, "sha256": IRON, "study": None},
            {"path": "x", "size": 1, "sha256": IRON[1:], "study": None},
            {"path": "x", "size": 1, "sha256": IRON, "study": ["METAL-1"]},
        ],
    )
    def test_a_malformed_entry_adds_no_file(self, trail, details):
        trail.add("received", "METAL-1", **details)
        assert trail.register.received == ()

    def test_only_what_an_entry_names_as_raw_data_is_raw_data(self, trail):
        trail.run(IRON)
        [use] = trail.register.uses
        assert (use.data, use.plan, use.exclusions) == ({IRON}, PLAN, None)

    def test_a_run_older_than_the_register_is_understood_by_the_digests_received_later(self, trail):
        inputs = {"configs/metal.yaml": PLAN, PATHS[IRON]: IRON}
        trail.add("allotted", "METAL-1/run-0001", number=1, inputs=inputs)
        trail.run(IRON, number=2)
        executions = trail.register.executions("METAL-1/run-0002")
        assert executions.number == 2
        assert executions.earlier[0].plan is None


class TestExecutions:
    def test_each_run_of_the_study_on_exactly_these_data_counts_whatever_became_of_it(self, trail):
        trail.run(IRON, number=1)
        trail.run(IRON, number=2, ends=("failed", "sealed"))
        trail.run(IRON, number=3, ends=("interrupted",))
        trail.run(IRON, number=4, ends=())
        found = [trail.register.executions(f"METAL-1/run-{number:04d}") for number in range(1, 5)]
        assert [each.number for each in found] == [1, 2, 3, 4]
        assert {len(each.same) for each in found} == {4}
        assert [use.outcome for use in found[3].same] == ["completed", "failed", "interrupted", "not ended"]

    def test_other_data_begin_a_count_of_their_own(self, trail):
        trail.run(IRON, number=1)
        trail.run(ZINC, number=2)
        trail.run(IRON, ZINC, number=3)
        assert [trail.register.executions(f"METAL-1/run-{n:04d}").number for n in (1, 2, 3)] == [1, 1, 1]

    def test_the_order_of_the_files_does_not_matter(self, trail):
        trail.run(IRON, ZINC, number=1)
        assert executions_of(trail, trail.run(ZINC, IRON, number=2)).number == 2

    def test_the_same_data_under_another_study_are_said_and_not_counted(self, trail):
        trail.run(IRON, study="TRIAL-9")
        executions = executions_of(trail, trail.run(IRON))
        assert executions.number == 1
        assert [use.subject for use in executions.others] == ["TRIAL-9/run-0001"]

    def test_a_run_on_a_part_of_the_data_is_said_and_not_counted(self, trail):
        trail.run(IRON, ZINC, number=1)
        trail.run(LEAD, number=2)
        executions = executions_of(trail, trail.run(IRON, number=3))
        assert executions.number == 1
        assert [use.subject for use in executions.others] == ["METAL-1/run-0001"]

    def test_plan_versions_are_those_of_definition_and_exclusions(self, trail):
        trail.run(IRON, number=1)
        trail.run(IRON, number=2, plan=OTHER_PLAN)
        executions = executions_of(trail, trail.run(IRON, number=3, exclusions="ee" * 32))
        assert [(use.plan, use.exclusions) for use in executions.same] == [
            (PLAN, None),
            (OTHER_PLAN, None),
            (PLAN, "ee" * 32),
        ]
        assert [use.number for use in executions.earlier] == [1, 2]

    def test_a_refused_run_is_no_execution(self, trail):
        trail.receive(IRON)
        trail.refuse(IRON)
        assert executions_of(trail, trail.run(IRON)).number == 1

    @given(runs=st.lists(st.tuples(st.sampled_from("AB"), st.sets(st.sampled_from(list(PATHS)), min_size=1))))
    def test_the_executions_on_each_set_of_data_are_numbered_from_one_without_a_gap(self, runs):
        trail, numbers = Trail(), dict.fromkeys("AB", 0)
        for study, data in runs:
            numbers[study] += 1
            trail.run(*sorted(data), study=study, number=numbers[study])
        register = trail.register
        counted = {}
        for use in register.uses:
            executions = register.executions(use.subject)
            key = (use.study, use.data)
            counted[key] = counted.get(key, 0) + 1
            assert executions.number == counted[key]
            assert use not in executions.others
            assert all(other.data & use.data for other in executions.others)
        assert sum(counted.values()) == len(runs)


class TestStates:
    def test_a_file_that_a_completed_run_has_read_is_used(self, trail):
        trail.run(IRON)
        [file] = data_files(trail.register, there(IRON))
        assert (file.state, file.notes, file.named_by) == ("used", (), ("METAL-1",))

    @pytest.mark.parametrize("ends", [("failed", "sealed"), ("interrupted",), ()])
    def test_a_file_in_no_completed_run_is_open(self, trail, ends):
        trail.run(IRON, ends=ends)
        [file] = data_files(trail.register, there(IRON))
        assert (file.state, file.notes) == ("open", ("in no completed run",))

    def test_a_file_that_was_refused_only_is_open(self, trail):
        trail.receive(IRON)
        entry = trail.refuse(IRON)
        [file] = data_files(trail.register, there(IRON))
        assert (file.state, file.notes) == ("open", ("in refused runs only",))
        assert [refusal.seq for refusal in file.refusals] == [entry.seq]

    def test_a_file_that_a_study_names_and_no_run_has_seen_is_open(self, trail):
        [file] = data_files(trail.register, there(IRON))
        assert (file.state, file.notes, file.received) == ("open", ("no run has seen it yet",), None)

    def test_a_file_that_no_study_names_is_an_orphan(self, trail):
        [file] = data_files(trail.register, there(IRON, named=()))
        assert (file.state, file.notes) == ("orphan", ("no study definition names it",))

    def test_a_file_seen_once_and_no_longer_named_is_an_orphan(self, trail):
        trail.receive(IRON)
        trail.refuse(IRON)
        [file] = data_files(trail.register, there(IRON, named=()))
        assert (file.state, file.notes[0]) == ("orphan", "no study definition names it any more")

    def test_a_file_seen_once_and_gone_is_an_orphan(self, trail):
        trail.receive(IRON)
        [file] = data_files(trail.register, [])
        assert (file.state, file.notes) == ("orphan", ("no longer there", "seen, and then in no run"))

    def test_bytes_that_were_replaced_are_an_orphan_and_the_new_ones_are_open(self, trail):
        trail.receive(IRON)
        trail.refuse(IRON)
        old, new = data_files(trail.register, [StandingFile(PATHS[IRON], 41, ZINC, ("METAL-1",))])
        assert (old.sha256, old.state) == (IRON, "orphan")
        assert old.notes[0] == f"changed since: other bytes lie there now (SHA-256 {ZINC[:8]})"
        assert (new.sha256, new.state, new.received) == (ZINC, "open", None)

    def test_bytes_that_a_run_has_used_stay_used_when_the_file_changes_or_goes(self, trail):
        trail.run(IRON)
        changed = data_files(trail.register, [StandingFile(PATHS[IRON], 41, ZINC, ())])
        gone = data_files(trail.register, [])
        assert [(file.state, file.notes[0][:13]) for file in changed] == [
            ("used", "changed since"),
            ("orphan", "no study defi"),
        ]
        assert [(file.state, file.notes) for file in gone] == [("used", ("no longer there",))]

    def test_a_file_that_was_renamed_is_known_by_its_bytes(self, trail):
        trail.receive(IRON)
        [file] = data_files(trail.register, [StandingFile("configs/data/fe.csv", 40, IRON, ("METAL-1",))])
        assert (file.path, file.state) == (PATHS[IRON], "open")
        assert file.notes[:2] == ("no longer there", "the same bytes lie at configs/data/fe.csv")

    def test_a_file_that_cannot_be_read_now_is_listed_once(self, trail):
        trail.receive(IRON)
        [file] = data_files(trail.register, [StandingFile(PATHS[IRON], 0, None, ("METAL-1",))])
        assert file.state == "open"
        assert file.notes[0].startswith("cannot be read now")

    def test_files_come_in_the_order_of_their_receipt_and_unseen_ones_by_path(self, trail):
        trail.run(ZINC)
        files = data_files(trail.register, there(LEAD, IRON, ZINC))
        assert [file.path for file in files] == [PATHS[ZINC], PATHS[IRON], PATHS[LEAD]]

    @pytest.mark.requirement("SOURCE-7")
    @given(
        st.lists(st.sampled_from(list(PATHS)), unique=True),
        st.lists(st.sampled_from(list(PATHS)), unique=True),
        st.booleans(),
    )
    def test_every_file_received_or_lying_there_has_exactly_one_state(self, received, standing, named):
        trail = Trail()
        for digest in received:
            trail.receive(digest)
        files = data_files(trail.register, there(*standing, named=("METAL-1",) if named else ()))
        assert sorted(file.sha256 for file in files) == sorted({*received, *standing})
