"""What a SCSI drive may warn of where it gives no verdict on itself."""

from enum import StrEnum


class DriveWarning(StrEnum):
    """Groups of the standard's warnings; the values of the signal ``drive-warning``.

    TEST is none: a drive that was told to try its prediction out sends one that is marked as false. UNNAMED
    stands for a warning without a cause, or with one that is not known here.
    """

    TEMPERATURE = "temperature"
    ENCLOSURE = "enclosure"
    SELF_TEST = "background-self-test"
    SCAN = "background-scan"
    CACHE = "write-cache"
    POWER = "power-loss"
    STATISTICS = "statistics"
    HUMIDITY = "humidity"
    FIRMWARE = "firmware"
    ELEMENT = "element"
    UNNAMED = "unnamed"
    TEST = "test"
