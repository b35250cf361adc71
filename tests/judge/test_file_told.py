from diskwatch.judge.file_told import which_file


def test_the_command_names_the_block_and_the_device_and_says_that_it_only_reads():
    told = which_file(sector=821_248, block=102_400, size=4_096, node="/dev/sda2", point="/srv/a\x1b[2J")
    assert told[0].startswith(
        "Sector 821,248 is block 102,400 (of 4,096 bytes) of the ext4 file system at /srv/a"
    )
    assert "they only read" in told[0]
    assert "\x1b" not in "".join(told)
    assert told[1] == "debugfs -R 'icheck 102400' /dev/sda2"
    assert told[2].startswith("debugfs -R 'ncheck INODE' /dev/sda2 ")
