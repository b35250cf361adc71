import pytest
from hypothesis import given, strategies as st

from diskwatch.machine.identity import recognise, same, serial_of, wwn_of
from diskwatch.records import Drive, Identity, Kind, KnownDrive, Place

WWN, OTHER_WWN = "naa.5000f00000000001", "naa.5000f00000000002"


def who(
    wwn: str | None = None, serial: str | None = None, model: str | None = "INVENTED", path: str = "/dev/sda"
) -> Identity:
    return Identity(wwn=wwn, model=model, serial=serial, path=path)


def known(number: int, identity: Identity, device: str | None = None) -> KnownDrive:
    return KnownDrive(
        number=number,
        drive=Drive(identity=identity, kind=Kind.HDD),
        place=Place(device=device or identity.path),
        first_seen=0,
    )


identities = st.builds(
    Identity,
    wwn=st.sampled_from(
        [None, WWN, OTHER_WWN, "NAA.5000F00000000001", "naa.0000000000000000", "eui.00f0000000000001"]
    ),
    model=st.sampled_from([None, "INVENTED", "invented ", "INVENTED DISK 40", "INVENTED DISK 4000"]),
    serial=st.sampled_from([None, "A1", "a1", "B2", "0000", "unknown", "0123456789"]),
    path=st.sampled_from(["/dev/sda", "/dev/sdb"]),
)


@given(identities, identities)
def test_sameness_is_symmetric(a: Identity, b: Identity):
    assert same(a, b) == same(b, a)


@given(identities)
def test_a_drive_is_the_same_as_itself(a: Identity):
    assert same(a, a)


@given(identities, st.lists(identities, max_size=6), st.randoms(use_true_random=False))
def test_the_order_of_the_known_drives_does_not_matter(told: Identity, many: list[Identity], random):
    drives = [known(number, identity) for number, identity in enumerate(many)]
    mixed = list(drives)
    random.shuffle(mixed)
    assert recognise(told, drives) == recognise(told, mixed)


@given(identities, st.lists(identities, max_size=6))
def test_whoever_is_recognised_is_the_same_and_a_lone_fit_is_recognised(told: Identity, many: list[Identity]):
    drives = [known(number, identity) for number, identity in enumerate(many)]
    fits = [one for one in drives if same(told, one.drive.identity)]
    found = recognise(told, drives)
    assert found is None or found in fits
    if len(fits) == 1:
        assert found == fits[0]


def test_a_world_wide_name_is_enough_where_the_serial_does_not_contradict():
    assert same(who(WWN, "A1"), who(WWN.upper(), None, path="/dev/sdb"))
    assert same(who(WWN, "A 1"), who(WWN, " a  1 ", model="OTHER"))
    assert not same(who(WWN, "A1"), who(WWN, "B2"))
    assert not same(who(WWN, "A1"), who(OTHER_WWN, "A1"))


def test_names_of_different_sorts_cannot_contradict_each_other():
    assert same(who("eui.00f0000000000001", "A1"), who("eui.00f000000000000100f0000000000001", "A1"))
    assert not same(who("eui.00f0000000000001", "A1"), who(WWN, "B2"))


def test_without_a_name_serial_and_model_must_both_be_equal():
    assert same(who(None, "A1"), who(WWN, "a1", path="/dev/sdb"))
    assert not same(who(None, "A1"), who(None, "A1", model="OTHER"))
    assert not same(who(None, "A1"), who(None, "A1", model=None))
    assert not same(who(None, "A1"), who(None, "B2"))


def test_a_model_that_the_kernel_cut_to_16_letters_is_still_the_model():
    assert same(who(None, "A1", "INVENTED DISK 40"), who(None, "A1", "INVENTED DISK 4000 LONGER"))
    assert not same(who(None, "A1", "INVENTED"), who(None, "A1", "INVENTED DISK 4000 LONGER"))


def test_the_path_counts_only_between_two_that_have_nothing_else():
    assert same(who(model=None), who())
    assert not same(who(), who(path="/dev/sdb"))
    assert not same(who(), who(model="OTHER"))
    assert not same(who(), who(None, "A1"))


@pytest.mark.parametrize(
    "serial", ["0000000000", "XXXXXXXX", "FFFF", "unknown", "None", " ", "-", "0x00000000"]
)
def test_a_placeholder_is_no_serial(serial: str):
    assert serial_of(who(None, serial)) is None


def test_a_counted_up_serial_is_an_invention_only_where_the_model_is_missing_too():
    assert serial_of(who(None, "0123456789ABCDEF", model=None)) is None
    assert serial_of(who(None, "0123456789ABCDEF")) == "0123456789abcdef"
    assert serial_of(who(None, "1234", model=None)) == "1234"


@pytest.mark.parametrize(
    "wwn",
    ["naa.0000000000000000", "naa.5000000000000000", "eui.ffffffffffffffff", "eui.", "uuid.00000000-0000-0000"],
)
def test_a_placeholder_is_no_world_wide_name(wwn: str):
    assert wwn_of(who(wwn)) is None


def test_drives_that_share_a_name_are_told_apart_by_serial_and_else_by_their_place():
    first, second = known(1, who(WWN, "A1", path="/dev/sda")), known(2, who(WWN, "B2", path="/dev/sdb"))
    assert recognise(who(WWN, "B2"), [first, second]) == second
    assert recognise(who(WWN, None, path="/dev/sda"), [first, second]) == first
    assert recognise(who(WWN, None, path="/dev/sdc"), [first, second]) is None
    assert recognise(who(WWN, "C3"), [first, second]) is None


def test_a_full_match_outweighs_one_that_leaves_the_serial_open():
    full, open_ = known(1, who(WWN, "A1", path="/dev/sda")), known(2, who(WWN, None, path="/dev/sdb"))
    assert recognise(who(WWN, "A1", path="/dev/sdb"), [full, open_]) == full
    assert recognise(who(WWN, None, path="/dev/sda"), [full, open_]) == open_


def test_a_drive_that_only_its_path_told_is_known_again_when_the_same_instance_tells_its_name():
    weak = known(1, who(model=None))
    assert recognise(who(WWN, "A1"), [weak], here=weak) == weak
    assert recognise(who(WWN, "A1"), [weak]) is None
    assert recognise(who(WWN, "A1"), [known(1, who(model="OTHER"))], here=known(1, who(model="OTHER"))) is None


def test_a_drive_that_told_its_name_stays_known_while_the_same_instance_is_silent():
    strong, stale = known(1, who(WWN, "A1")), known(2, who())
    assert recognise(who(), [strong, stale], here=strong) == strong
    assert recognise(who(model=None), [strong, stale], here=strong) == strong


def test_a_nameless_drive_of_another_model_does_not_inherit_the_place_of_the_one_before():
    strong = known(1, who(WWN, "A1"))
    assert recognise(who(model="OTHER"), [strong], here=strong) is None


def test_another_name_in_the_same_instance_is_another_drive():
    strong = known(1, who(WWN, "A1"))
    assert recognise(who(OTHER_WWN, "B2"), [strong], here=strong) is None


def test_a_known_drive_is_found_again_wherever_it_is_plugged_in():
    moved, here = known(1, who(WWN, "A1", path="/dev/sda")), known(2, who(path="/dev/sdb"))
    assert recognise(who(WWN, "A1", path="/dev/sdb"), [here, moved], here=here) == moved
