from diskwatch.machine.kernel_texts import told
from diskwatch.machine.protocol import Counted
from diskwatch.machine.senses import RealSenses
from diskwatch.machine.standstill import looked
from diskwatch.records import IoCounts, LeftOff
from tests.machine.trees import Tree


def senses(tree: Tree, source="/dev/kmsg"):
    return RealSenses(str(source), sys_root=tree.sys, proc_root=tree.proc, dev_root=tree.dev)


def test_a_log_is_followed_from_where_it_was_left(tree: Tree, tmp_path):
    source = tmp_path / "kmsg"
    source.write_text("6,1,10,-;one\n6,2,20,-;two\n")
    log = senses(tree, source).log(LeftOff(log="6,1,10,-", sequence=1))
    assert [line.text for line in log.read()] == ["two"]
    log.close()


def test_drives_go_by_their_names_and_what_lies_on_them_counts(tree: Tree):
    disk = tree.sata()
    tree.stacked("dm-0", "253:0", disk)
    tree.put(tree.sys / "fs/ext4/dm-0/errors_count", "4")
    here = senses(tree)
    assert here.names({"1": ["sda"]})["dm-0"] == ("1",)
    assert [(value.signal, value.value) for value in here.kept(["sda"])] == [("ext4-errors", 4)]


def test_a_failed_read_of_a_volume_leads_to_its_drive_though_no_counter_of_that_moves(
    tree: Tree,
):
    disk = tree.sata()
    tree.stacked("dm-0", "253:0", disk)
    here = senses(tree)
    read = told("Buffer I/O error on dev dm-0, logical block 1, async page read")
    assert read is not None
    assert here.names({"1": ["sda"]})[read.parts["name"] or ""] == ("1",)
    tree.put(tree.sys / "fs/ext4/dm-0/errors_count", "1")
    assert [(value.signal, value.value) for value in here.kept(["sda"])] == [("ext4-errors", 1)]
    idle = IoCounts(reads=5, writes=0, read_bytes=0, write_bytes=0, read_ms=0, write_ms=0, busy_ms=0)
    seen = Counted(counts=idle, instance="1", in_flight=0)
    assert not looked(looked(None, seen, 0.0), seen, 100.0).hung


def test_the_state_of_a_pool_reaches_its_drives(tree: Tree):
    tree.partition(tree.sata(), "sda1", "8:1", label="zfs-00c0ffee00c0ffee")
    tree.zfs("tank", "DEGRADED")
    assert [(value.signal, value.value) for value in senses(tree).kept(["sda"])] == [("degraded-arrays", 1)]


def test_the_clock_of_the_log_only_moves_forward(tree: Tree):
    here = senses(tree)
    assert 0 < here.uptime() <= here.uptime()
    assert not here.on_battery()
