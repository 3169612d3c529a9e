"""Wrong input: exit status, the whole text of the message, and nothing written. No traceback ever."""

import os

import pytest

from groundroll.command import main

from ..running.small import SMALL, changed


def answer(capsys, monkeypatch, folder, *arguments) -> tuple[int, str, str]:
    monkeypatch.chdir(folder)
    try:
        status = main([str(a) for a in arguments])
    except SystemExit as exit:  # argparse
        status = exit.code
    out, err = capsys.readouterr()
    return status, out, err


@pytest.fixture
def ask(capsys, monkeypatch, tmp_path):
    return lambda *arguments: answer(capsys, monkeypatch, tmp_path, *arguments)


def test_new_writes_a_scenario_once(ask, tmp_path):
    assert ask("new", "a.toml") == (0, "wrote a.toml; next: groundroll plan a.toml\n", "")
    text = (tmp_path / "a.toml").read_text()
    assert ask("new", "a.toml") == (2, "", "groundroll new: a.toml: a file of this name is there already; choose another name\n")
    assert (tmp_path / "a.toml").read_text() == text
    assert ask("new", "b.toml", "-q") == (0, "", "")


def test_new_in_a_folder_that_is_not_there(ask):
    assert ask("new", "no/a.toml") == (4, "", "groundroll new: no/a.toml: cannot be written (No such file or directory)\n")


@pytest.mark.parametrize("command", ["plan", "run"])
def test_a_missing_scenario(ask, tmp_path, command):
    message = "no.toml: no such file; allowed a scenario file in TOML; `groundroll new no.toml` writes one\n"
    assert ask(command, "no.toml") == (2, "", f"groundroll {command}: {message}")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("command", ["plan", "run"])
def test_a_folder_for_a_scenario(ask, tmp_path, command):
    (tmp_path / "folder").mkdir()
    message = "folder: a folder; allowed a scenario file in TOML; name the file in it\n"
    assert ask(command, "folder") == (2, "", f"groundroll {command}: {message}")


@pytest.mark.parametrize("command", ["plan", "run"])
def test_a_wrong_value(ask, tmp_path, command):
    (tmp_path / "a.toml").write_text(changed(SMALL, ("vp = 350.0", "vp = 0.35")))
    message = (
        "a.toml:10: ground.layer[1].vp: metres per second? this looks like km/s (received 0.35); "
        "allowed 50 to 10000 m/s; write vp = 350.0\n"
    )
    assert ask(command, "a.toml") == (2, "", f"groundroll {command}: {message}")
    assert [path.name for path in tmp_path.iterdir()] == ["a.toml"]


@pytest.mark.parametrize("command", ["plan", "run"])
@pytest.mark.parametrize("given", ["0", "two", "-1", "1.5", "5000"])
def test_a_bad_number_of_threads(ask, command, given):
    status, out, err = ask(command, "a.toml", f"--threads={given}")
    assert (status, out) == (2, "")
    assert err.splitlines()[-1] == (
        f"groundroll {command}: error: argument --threads: {given!r} is not a number of threads; "
        "write a whole number from 1 to 1024, e.g. 2"
    )


@pytest.mark.parametrize("given", [("0", "2000"), ("8", "wide")])
def test_a_bad_order(ask, given):
    status, out, err = ask("run", "a.toml", "--order", *given)
    wrong = next(word for word in given if not (word.isdigit() and int(word)))
    assert (status, out) == (2, "")
    assert err.splitlines()[-1] == (
        f"groundroll run: error: argument --order: {wrong!r} is not a whole number above 0; write e.g. --order 8 2000"
    )


def test_no_command_and_an_unknown_one(ask):
    assert ask()[0] == 2
    status, _, err = ask("walk")
    assert status == 2 and "invalid choice: 'walk'" in err


@pytest.mark.parametrize("arguments", [("--help",), ("new", "--help"), ("plan", "--help"), ("run", "--help"), ("draw", "--help")])
def test_help(ask, arguments):
    status, out, err = ask(*arguments)
    assert status == 0 and out.startswith("usage: groundroll") and err == ""


def test_quiet_plan_says_nothing(ask, tmp_path):
    (tmp_path / "a.toml").write_text(SMALL)
    assert ask("plan", "a.toml", "-q", "--threads", "1") == (0, "", "")


def test_two_scenarios_that_would_share_a_folder(ask, tmp_path):
    (tmp_path / "b").mkdir()
    for name in ("a.toml", "b/a.toml"):
        (tmp_path / name).write_text(SMALL)
    message = "groundroll run: b/a.toml and a.toml would both run in outputs/a; rename one of the files\n"
    assert ask("run", "a.toml", "b/a.toml") == (2, "", message)
    assert not (tmp_path / "outputs").exists()


PULSE = ('{ shape = "ricker", frequency = 16.0 }', '{ file = "pulse.csv" }')


@pytest.mark.parametrize("command", ["plan", "run"])
@pytest.mark.parametrize(
    ("content", "message"),
    [
        (None, "{}: the pulse file cannot be read (No such file or directory); check pulse.file"),
        ("time,value\n0,0\n0.1,nan\n", "{}:3: '0.1,nan' is not a pair time,value of finite numbers; write e.g. 0.001,0.25"),
        ("0,0\n0.1,inf\n0.2,0\n", "{}:2: '0.1,inf' is not a pair time,value of finite numbers; write e.g. 0.001,0.25"),
        ("0,0\n0.1\n", "{}:2: '0.1' is not a pair time,value of finite numbers; write e.g. 0.001,0.25"),
        ("# one sample\n0,1\n", "{}: 1 samples; a pulse needs at least 2 lines of time,value"),
        ("", "{}: 0 samples; a pulse needs at least 2 lines of time,value"),
        ("0,0\n0.2,1\n0.1,0\n", "{}: time 0.1 s does not come after 0.2 s; sort the lines by time"),
        (b"\xff\xfe\x00", "{}: the pulse file cannot be read (it is not UTF-8 text); check pulse.file"),
    ],
)
def test_a_bad_pulse_file(ask, tmp_path, command, content, message):
    (tmp_path / "a.toml").write_text(changed(SMALL, PULSE))
    pulse = tmp_path / "pulse.csv"
    if content is not None:
        pulse.write_bytes(content if isinstance(content, bytes) else content.encode())
    assert ask(command, "a.toml") == (2, "", f"groundroll {command}: {message.format(pulse)}\n")
    assert not (tmp_path / "outputs").exists()


def test_a_good_pulse_file_is_found_beside_its_scenario(ask, tmp_path):
    (tmp_path / "b").mkdir()
    (tmp_path / "b" / "a.toml").write_text(changed(SMALL, PULSE))
    rows = [f"{0.002 * n},{max(0.0, 1 - abs(n - 20) / 20)}" for n in range(41)]
    (tmp_path / "b" / "pulse.csv").write_text("time,value\n" + "\n".join(rows))
    status, out, err = ask("plan", "b/a.toml", "--threads", "1")
    assert (status, err) == (0, "") and out.startswith("spacing ")


def test_draw_without_records(ask, tmp_path):
    assert ask("draw", "no") == (4, "", "groundroll draw: no records at no: there is no such file or folder\n")
    (tmp_path / "empty").mkdir()
    message = "groundroll draw: no records in empty: it holds neither records.h5 nor records.h5.partial\n"
    assert ask("draw", "empty") == (4, "", message)


def test_draw_of_an_unknown_kind(ask, tmp_path):
    message = "groundroll draw: no figure is called 'map'; known: record_section, peaks, wavefield, ground\n"
    assert ask("draw", ".", "--only", "map") == (2, "", message)


def test_draw_of_a_file_that_holds_no_records(ask, tmp_path):
    (tmp_path / "records.h5").write_text("no HDF5")
    status, out, err = ask("draw", ".")
    assert (status, out) == (4, "") and err.startswith("groundroll draw: records.h5 cannot be read as records: ")
    assert len(err.splitlines()) == 1


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write anywhere")
@pytest.mark.parametrize("command", ["new", "run"])
def test_a_folder_that_may_not_be_written(ask, tmp_path, command):
    (tmp_path / "a.toml").write_text(SMALL)
    locked = tmp_path / "locked"
    locked.mkdir(mode=0o500)
    arguments = ("new", "locked/b.toml") if command == "new" else ("run", "a.toml", "--out", "locked/b", "--threads", "1")
    message = {
        "new": "groundroll new: locked/b.toml: cannot be written (Permission denied)\n",
        "run": "groundroll run: locked/b: the folder cannot be made (Permission denied); choose another with --out\n",
    }
    assert ask(*arguments) == (4, "", message[command])


def test_a_path_through_a_file(ask, tmp_path):
    (tmp_path / "a.toml").write_text(SMALL)
    status, out, err = ask("run", "a.toml", "--out", "a.toml/b", "--threads", "1", "-q")
    message = "groundroll run: a.toml/b: the folder cannot be made (Not a directory); choose another with --out\n"
    assert (status, out, err) == (4, "", message)
