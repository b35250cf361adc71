from dataclasses import replace

from diskwatch.records import Identity, Mount, Place
from diskwatch.records.owner import OwnerFacts
from diskwatch.ticket.names import Hidden, names
from tests.ticket.lives import HOST
from tests.ticket.test_cautions import LINE

OTHER = replace(
    LINE,
    number=2,
    drive=replace(LINE.drive, identity=Identity(wwn=None, model="x", serial="INV0009", path="/dev/sdb")),
    place=Place(device="/dev/sdb", lives_here=(Mount(point="/"), Mount(point="/srv/photos"))),
    owner=OwnerFacts(replaced_by="INV0077"),
)


def _told(*kinds):
    return {(one.text, one.alias) for one in names(kinds, (OTHER, LINE), HOST)}


def test_serials_and_world_wide_names_of_all_drives_are_hidden_also_of_the_one_that_took_its_place():
    assert _told(Hidden.SERIAL) == {
        ("INV0001", "serial-1"),
        ("naa.5f00d00000000001", "wwn-1"),
        ("INV0009", "serial-2"),
        ("INV0077", "serial-of-the-one-after-2"),
    }


def test_the_host_is_hidden_with_its_short_name_and_all_users():
    assert _told(Hidden.HOST) == {
        ("studio-box.example", "host-1"),
        ("studio-box", "host-1"),
        ("marigold", "user-1"),
    }


def test_a_person_with_a_home_of_their_own_is_hidden_though_no_list_of_users_names_them():
    mounts = (Mount(point="/home/bramble"), Mount(point="/run/media/marigold/stick"), Mount(point="/home"))
    line = replace(LINE, place=replace(LINE.place, lives_here=mounts))
    told = {one.text: one.alias for one in names((Hidden.HOST,), (line,), HOST)}
    assert (told["marigold"], told["bramble"]) == ("user-1", "user-2")


def test_every_mount_point_is_hidden_but_the_root_that_all_machines_have():
    assert _told(Hidden.PATHS) == {("/srv/photos", "path-2")}


def test_nothing_is_hidden_unasked_and_no_serial_that_stands_for_nothing():
    assert names((), (LINE,), HOST) == ()
    nobody = replace(
        LINE, drive=replace(LINE.drive, identity=Identity(wwn="naa.0", model="x", serial="0000", path=""))
    )
    assert names((Hidden.SERIAL,), (nobody,), HOST) == ()
