import pytest
from hypothesis import given, strategies as st

from diskwatch.machine.kernel_texts import TEXTS, Says, told

# Wordings of several versions as printed; devices and numbers are invented.
KNOWN = (
    (Says.REQUEST, "sda", "I/O error, dev sda, sector 2048 op 0x0:(READ) flags 0x800 phys_seg 1 prio class 2"),
    (
        Says.REQUEST,
        "nvme0n1",
        "critical medium error, dev nvme0n1, sector 8 op 0x1:(WRITE) flags 0x0 phys_seg 1",
    ),
    (
        Says.REQUEST,
        "sdb",
        "blk_update_request: I/O error, dev sdb, sector 77 op 0x0:(READ) flags 0x0 phys_seg 1",
    ),
    (Says.REQUEST, "sdb", "blk_update_request: critical medium error, dev sdb, sector 77"),
    (Says.REQUEST, "sdb", "print_req_error: I/O error, dev sdb, sector 77 flags 80700"),
    (Says.REQUEST, "sdb", "end_request: I/O error, dev sdb, sector 77"),
    (Says.REQUEST, "sdb", "timeout error, dev sdb, sector 77 op 0x0:(READ) flags 0x0 phys_seg 1 prio class 0"),
    (Says.REQUEST, "cciss!c0d0", "I/O error, dev cciss!c0d0, sector 1 op 0x0:(READ) flags 0x0 phys_seg 1"),
    (Says.PAGE_LOST, "sdb1", "Buffer I/O error on dev sdb1, logical block 5, lost async page write"),
    (Says.PAGE_LOST, "sdb1", "Buffer I/O error on dev sdb1, logical block 5, lost sync page write"),
    (Says.PAGE_UNREAD, "sdb1", "Buffer I/O error on dev sdb1, logical block 5, async page read"),
    (Says.EXCEPTION, "ata3.00", "ata3.00: exception Emask 0x10 SAct 0x0 SErr 0x4040000 action 0xe frozen"),
    (Says.COMMAND_FAILED, "ata3.00", "ata3.00: failed command: READ FPDMA QUEUED"),
    (
        Says.RESULT,
        "ata3.00",
        r"ata3.00: cmd 60/08:00 tag 0 ncq dma in\x0a         res 41/40:08 Emask 0x409 (media error) <F>",
    ),
    (Says.RESULT, None, "         res 40/00:00:00:00:00/00:00:00:00:00/00 Emask 0x4 (timeout)"),
    (Says.ERROR_BITS, "ata3.00", "ata3.00: error: { UNC }"),
    (Says.LINK_BITS, "ata3", "ata3: SError: { PHYRdyChg CommWake DevExch }"),
    (Says.RESET, "ata3", "ata3: hard resetting link"),
    (Says.SLOWED, "ata3", "ata3: limiting SATA link speed to 3.0 Gbps"),
    (Says.SLOWED, "ata3.00", "ata3.00: limiting speed to UDMA/66:PIO4"),
    (Says.SLOWED, "ata3.00", "ata3.00: NCQ disabled due to excessive errors"),
    (Says.GIVEN_UP, "ata3.00", "ata3.00: disable device"),
    (Says.GIVEN_UP, "ata3", "ata3: reset failed, giving up"),
    (Says.DETAIL, "ata3", "ata3: EH complete"),
    (Says.DETAIL, "ata3", "ata3: SATA link up 6.0 Gbps (SStatus 133 SControl 300)"),
    (Says.SENSE_KEY, "sde", "sd 8:0:0:0: [sde] tag#122 Sense Key : Medium Error [current] "),
    (Says.SENSE_KEY, "sde", "sd 8:0:0:0: [sde] tag#1 Sense Key : Hardware Error [current] [descriptor] "),
    (Says.SENSE_MORE, "sde", "sd 8:0:0:0: [sde] tag#122 Add. Sense: Unrecovered read error"),
    (
        Says.HOST_RESULT,
        "sde",
        "sd 8:0:0:0: [sde] tag#4 FAILED Result: hostbyte=DID_TIME_OUT driverbyte=DRIVER_OK",
    ),
    (Says.OFFLINED, None, "sd 8:0:0:0: Device offlined - not ready after error recovery"),
    (Says.OFFLINED, "sde", "sd 8:0:0:0: [sde] rejecting I/O to offline device"),
    (Says.STOPPED, "sde", "sd 8:0:0:0: [sde] Stopping disk"),
    (Says.DETAIL, "sde", "sd 8:0:0:0: [sde] tag#17 CDB: Read(10) 28 00 00 00 08 00 00 00 01 00"),
    (Says.NVME_TIMEOUT, "nvme0", "nvme nvme0: I/O 5 (I/O Cmd) QID 1 timeout, aborting"),
    (Says.NVME_TIMEOUT, "nvme0", "nvme nvme0: I/O 5 QID 1 timeout, reset controller"),
    (
        Says.NVME_TIMEOUT,
        "nvme0",
        "nvme nvme0: I/O tag 489 (d1e9) opcode 0x1 (I/O Cmd) QID 3 timeout, aborting req_op:WRITE(1) size:512",
    ),
    (Says.NVME_LOST_INTERRUPT, "nvme0", "nvme nvme0: I/O 5 QID 1 timeout, completion polled"),
    (Says.NVME_DOWN, "nvme0", "nvme nvme0: controller is down; will reset: CSTS=0xffffffff, PCI_STATUS=0xffff"),
    (Says.NVME_DOWN, "nvme0", "nvme nvme0: Disabling device after reset failure: -19"),
    (Says.NVME_STATUS, "nvme0n1", "nvme0n1: I/O Cmd(0x2) @ LBA 2048, 1 blocks, I/O Error (sct 0x2 / sc 0x81) "),
    (
        Says.NVME_STATUS,
        "nvme0n1",
        "nvme0n1: Read(0x2) @ LBA 1, 8 blocks, Unrecovered Read Error (sct 0x2 / sc 0x81) DNR",
    ),
    (
        Says.FILE_SYSTEM,
        "dm-0",
        "EXT4-fs error (device dm-0): __ext4_find_entry:1685: inode #2: comm ls: reading",
    ),
    (Says.FILE_SYSTEM, "sda1", "EXT4-fs (sda1): Remounting filesystem read-only"),
    (Says.FILE_SYSTEM, "dm-0", "Aborting journal on device dm-0-8."),
    (Says.FILE_SYSTEM, "sda1", "Aborting journal on device sda1-8."),
    (Says.FILE_SYSTEM, "dm-0", "JBD2: I/O error when updating journal superblock for dm-0-8."),
    (
        Says.FILE_SYSTEM,
        "sda3",
        "BTRFS error (device sdb3): bdev /dev/sda3 errs: wr 0, rd 1, flush 0, corrupt 0, gen 0",
    ),
    (
        Says.FILE_SYSTEM,
        "sda3",
        "BTRFS error (device sda3): parent transid verify failed on logical 1 wanted 2 found 1",
    ),
    (Says.FILE_SYSTEM, "sda2", 'XFS (sda2): metadata I/O error in "xfs_trans" at daddr 0x10 len 8 error 5'),
    (Says.ARRAY_DROPPED, "sdb1", "md/raid1:md0: Disk failure on sdb1, disabling device."),
    (Says.ARRAY_MENDED, "sdb1", "md/raid1:md0: read error corrected (8 sectors at 2048 on sdb1)"),
    (Says.WOKE, None, "PM: suspend exit"),
)


@pytest.mark.parametrize(("says", "name", "line"), KNOWN)
def test_every_wording_says_what_it_means_and_of_which_device(says, name, line):
    said = told(line)
    assert said is not None
    assert said.says is says
    assert said.parts.get("name") == name


def test_every_row_of_the_table_has_an_example_and_a_source():
    for text in TEXTS:
        assert text.source
        assert any(text.pattern.fullmatch(line) for _, _, line in KNOWN), text.pattern.pattern


def test_lines_of_other_things_are_none_of_ours():
    for line in (
        "",
        "usb 1-4: new high-speed USB device number 3",
        "eth0: link up",
        "audit: type=1400",
        "I/O APIC",
    ):
        assert told(line) is None


def test_a_line_about_drives_that_no_row_knows_is_told_apart():
    said = told("ata3.00: something that was never printed before")
    assert said is not None
    assert said.says is None


@given(st.text(max_size=200))
def test_no_text_raises(line):
    told(line)
