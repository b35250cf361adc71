from diskwatch.machine.kernel_names import kernel_names
from tests.machine.trees import Tree


def test_every_name_that_the_kernel_may_use_leads_to_the_drive(tmp_path):
    tree = Tree(tmp_path)
    sata = tree.sata("sda", "8:0")
    part = tree.partition(sata, "sda1", "8:1")
    tree.stacked("dm-0", "253:0", part)
    tree.nvme("nvme0", 2)
    tree.usb("sdb", "8:16")
    tree.virtio("vda")
    found = kernel_names(
        {"1": ["sda"], "2": ["nvme0n1", "nvme0n2"], "3": ["sdb"], "4": ["vda"]},
        sys_root=tree.sys,
        dev_root=tree.dev,
    )
    by_drive = {key: sorted(name for name, keys in found.items() if keys == (key,)) for key in "1234"}
    assert {"sda", "sda1", "dm-0"} <= set(by_drive["1"])
    assert any(name.startswith("ata") and "." in name for name in by_drive["1"])
    assert any(name.startswith("ata") and "." not in name for name in by_drive["1"])
    assert {"nvme0", "nvme0n1", "nvme0n2"} <= set(by_drive["2"])
    assert any(name.count(":") == 3 for name in by_drive["3"])
    assert by_drive["4"] == ["vda"]


def test_a_volume_over_two_drives_names_both(tmp_path):
    tree = Tree(tmp_path)
    one, other = tree.virtio("vda", "254:0"), tree.virtio("vdb", "254:16", serial="other")
    tree.stacked("md0", "9:0", one, other)
    found = kernel_names({"1": ["vda"], "2": ["vdb"]}, sys_root=tree.sys, dev_root=tree.dev)
    assert found["md0"] == ("1", "2")


def test_a_drive_that_has_just_gone_names_nothing_and_does_no_harm(tmp_path):
    tree = Tree(tmp_path)
    assert kernel_names({"1": ["sdz"]}, sys_root=tree.sys, dev_root=tree.dev) == {"sdz": ("1",)}
