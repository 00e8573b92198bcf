"""Running: equal bits however it is done, progress, Ctrl-C."""

import subprocess
import sys
import time

import pytest

import albedra as al

CTRL_C = """
import os, signal, sys, threading, time
import albedra as al

box = al.Enclosure.cuboid((1, 1, 1), coating=al.Coating.lambertian(0.5))
experiment = al.Experiment(box, al.Source.volume())
sent = []
enough = threading.Event()

def interrupt():
    enough.wait(None if wanted else 1.0)
    sent.append(time.monotonic())
    os.kill(os.getpid(), signal.SIGINT)

wanted = int(sys.argv[1])

def tell(progress):
    if progress.done >= wanted:
        enough.set()

threading.Thread(target=interrupt).start()
try:
    experiment.trace(10**12, seed=7, progress=tell if wanted else False)
except KeyboardInterrupt as error:
    took = time.monotonic() - sent[0]
    assert type(error) is al.Interrupted, type(error)
    assert took < 1.0, took
    part = error.result
    if part is not None:
        assert part == experiment.trace(part.photons, seed=7)
        assert part.intervals == ((0, part.photons),)
    print(0 if part is None else part.photons)
"""


@pytest.mark.parametrize("wait", [0, 300_000])
def test_ctrl_c_stops_within_a_second_and_gives_what_is_done(wait):
    child = subprocess.run(
        [sys.executable, "-I", "-c", CTRL_C, str(wait)],
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
    )
    assert child.returncode == 0, child.stderr
    # Batches have 65 536 photons. Without progress no Python code runs that would see the signal.
    assert int(child.stdout) >= (65_536 if wait else 0)


def test_an_exception_of_the_callable_stops_the_run_and_comes_out_unchanged(endless):
    class EnoughError(Exception):
        pass

    raised = EnoughError("now")

    def tell(progress):
        raise raised

    begun = time.monotonic()
    with pytest.raises(EnoughError) as caught:
        endless.trace(10**12, progress=tell)
    assert caught.value is raised
    assert time.monotonic() - begun < 1.5


def test_the_callable_is_told_how_far_the_run_is(endless):
    told = []
    result = endless.trace(15_000, seed=7, progress=told.append)
    assert len(told) > 1
    assert all(isinstance(progress, al.Progress) for progress in told)
    assert [p.done for p in told] == sorted(p.done for p in told)
    assert (told[-1].done, told[-1].wanted, told[-1].left) == (15_000, 15_000, 0.0)
    assert result == endless.trace(15_000, seed=7, progress=False)


def test_the_interpreter_is_free_while_photons_are_traced(endless):
    """A thread that counts goes on counting."""
    import threading

    count, done = 0, threading.Event()

    def tick():
        nonlocal count
        while not done.wait(0.005):
            count += 1

    counter = threading.Thread(target=tick)
    counter.start()
    begun = time.monotonic()
    endless.trace(10_000)
    took = time.monotonic() - begun
    done.set()
    counter.join()
    assert count > took / 0.005 / 10


def test_no_progress_is_shown_without_a_terminal(endless, capfd):
    endless.trace(2000)
    assert capfd.readouterr() == ("", "")


def test_lines_are_shown_without_a_terminal_if_asked_for(endless, capfd):
    endless.trace(2000, progress=True)
    out, err = capfd.readouterr()
    assert out == ""
    assert err.splitlines()[-1].startswith("100.0 %  2 k/2 k photons")


def test_a_bar_keeps_to_its_line():
    import io

    from albedra._progress import Bar

    stream = io.StringIO()
    bar = Bar(stream)
    bar(al.Progress._rebuild(10**11, 10**12, 3e5, 3.3e5, 2.7e6, 0.0123))
    bar.close(complete=False)
    (line, end) = stream.getvalue().split("\n")
    assert line.startswith("\r[#...")
    assert "u 1.2 %" in line
    assert "100 G/1 T photons  330 k/s  750 h left" in line
    assert len(line) <= 80 + len("  stopped")
    assert end == ""


def test_a_notebook_gets_a_bar_of_tqdm(capfd):
    from albedra._progress import _notebook_bar, close

    bar = _notebook_bar()
    bar(al.Progress._rebuild(50, 200, 1.0, 50.0, 3.0, 0.0123))
    bar(al.Progress._rebuild(200, 200, 4.0, 50.0, 0.0, None))
    close(bar, True)
    shown = capfd.readouterr().err
    assert "25%" in shown
    assert "u 1.2 %" in shown
    assert "200/200" in shown


@pytest.mark.parametrize("threads", [1, 2, 7])
def test_threads_do_not_change_a_bit(experiment, outcome, threads):
    assert experiment.trace(20_000, seed=7, threads=threads) == outcome


def test_parts_continue_and_merge_to_the_whole(experiment, outcome):
    head = experiment.trace(12_345, seed=7)
    assert experiment.trace(20_000 - 12_345, resume=head) == outcome
    tail = experiment.trace(20_000 - 12_345, seed=7, first=12_345)
    assert tail.intervals == ((12_345, 20_000),)
    assert head.merge(tail) == tail.merge(head) == outcome
    assert head.photons == 12_345


def test_parts_that_do_not_belong_together_are_refused(chamber, experiment, outcome):
    with pytest.raises(al.MergeError, match="photons 0 to 19999 are there already"):
        outcome.merge(outcome)
    with pytest.raises(al.MergeError, match="another seed"):
        outcome.merge(experiment.trace(100, seed=8, first=10**6))
    other = al.Experiment(chamber, al.Source.volume())
    with pytest.raises(al.MergeError, match="another experiment"):
        other.trace(10**12, resume=outcome)
    with pytest.raises(ValueError, match="seed must be that of the outcome to continue, 7, got 8"):
        experiment.trace(100, resume=outcome, seed=8)
    with pytest.raises(ValueError, match="first follows"):
        experiment.trace(100, resume=outcome, first=3)


def test_a_target_is_met_and_equals_the_plain_run(experiment):
    result = experiment.trace(10**6, seed=7, target=("z-.incident", 0.01))
    assert result.target.met == (result.flux["z-"].incident.relative <= 0.01)
    assert result.target.reached == pytest.approx(result.flux["z-"].incident.relative)
    plain = experiment.trace(result.photons, seed=7)
    assert plain.target is None
    assert plain.flux == result.flux
    assert plain.decay == result.decay


def test_numbers_agree_with_each_other(outcome):
    ledger = outcome.ledger
    assert ledger.closes
    lost = sum(flux.absorbed.value + flux.escaped.value for flux in outcome.flux.values())
    assert lost == pytest.approx(ledger.absorbed.value + ledger.escaped.value, rel=1e-12)
    assert outcome.decay.energy[0] == 5.0
    assert outcome.output("detector.incident") == outcome.flux["detector"].incident
    ratio = outcome.ratio("detector.incident", "sample.incident")
    same = outcome.estimate(lambda get: get["detector.incident"] / get["sample.incident"])
    assert (same.value, same.u) == (ratio.value, ratio.u)
    assert set(outcome.outputs) >= {"mean_free_path", "ledger.roulette", "sample.direct"}
    assert outcome.flight_moment(1) == outcome.mean_free_path
    assert outcome.flight_moment(3).unit == "m³"
    # All photons start at the lamp, less than the chamber's diagonal away from every wall.
    assert 0.25 < outcome.first_flight_moment(1).value < 1.53
    assert outcome.switch_on.energy[-1] + outcome.switch_off.energy[-1] == pytest.approx(
        outcome.stored_energy.value, rel=1e-9
    )
    cells = outcome.maps["z-"]
    assert (cells.irradiance * cells.area).sum() == pytest.approx(outcome.flux["z-"].incident.value, rel=1e-9)


def test_an_exception_within_an_estimate_comes_out_unchanged(outcome):
    with pytest.raises(KeyError, match="nonsense"):
        outcome.estimate(lambda get: get["nonsense"])
    with pytest.raises(ZeroDivisionError):
        outcome.estimate(lambda get: 1 / 0)


def test_the_mean_free_path_is_four_volumes_over_the_area():
    """Where it must hold: one Lambertian coating, light from the walls."""
    box = al.Enclosure.cuboid((1.2, 0.8, 0.5), coating=al.Coating.lambertian(0.9))
    result = al.Experiment(box, al.Source.walls()).trace(50_000, seed=7)
    assert result.facts.mean_chord_must_hold
    assert result.mean_free_path.p_value(box.mean_chord) > 7e-6
    assert result.mean_free_path.relative < 1e-3
