from diskwatch.records import DriveRound, KnownDrive
from diskwatch.rehearsal.clock import START
from diskwatch.rehearsal.course import Course
from diskwatch.rehearsal.happenings import Dies
from tests.rehearsal.examples import HDD, NVME, scenario


def lived(course: Course) -> tuple[list[int], int]:
    asked: list[int] = []
    counted = 0

    def ask():
        asked.append(course.clock.now())
        for found in course.machine.survey().found:
            known = KnownDrive(number=1, drive=found.drive, place=found.place, first_seen=START)
            yield DriveRound(known=known, pass_=course.machine.ask(found), state=None)

    def count():
        nonlocal counted
        counted += 1

    for _ in course.run(ask, count):
        pass
    return asked, counted


def test_drives_are_asked_at_the_interval_and_counted_at_every_step():
    asked, counted = lived(Course(scenario(days=3)))
    assert [(at - START) / 3600 for at in asked[:4]] == [1, 6, 12, 18]
    assert len(asked) == 13
    assert asked == sorted(set(asked)), "time never repeats"
    assert counted == 72


def test_a_machine_that_is_off_is_not_asked():
    asked, counted = lived(Course(scenario(habit="office"), days=7))
    assert counted == 5 * 12
    assert len(asked) == 15
    assert all(7 <= at % 86_400 / 3600 <= 19 for at in asked)


def test_what_died_counts_as_failed_and_what_was_read_until_then_is_told():
    course = Course(scenario(event=(Dies(day=1, drive=HDD),)), seed=5, days=2)
    lived(course)
    ended = course.ended()
    assert (ended.seed, ended.end - ended.start) == (5, 2 * 86_400)
    assert {serial: story.failed for serial, story in ended.stories.items()} == {HDD: True, NVME: False}
    assert ended.stories[HDD].last == START + 18 * 3600
