"""Bores of another unit, tags named twice, output that lacks a letter, folders in the place of files."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest
from project_texts import LAYOUT_PROJECT, PIPES, TABLE_PROJECT, faults, write

from supplycheck.report.package import write_files


@pytest.mark.parametrize("bore", ["108", "30.68", "0.3068"])
def test_a_bore_in_another_unit_is_a_fault(tmp_path: Path, bore: str) -> None:
    """Size 3 is 3.068 in inside (ASME B36.10, schedule 40); in mm or a decimal off it is no such pipe."""
    own = LAYOUT_PROJECT.replace('material = "steel schedule 40"', "X", 1)
    own = own.replace("X", f'material = "steel schedule 40"\nbores = {{ "3" = {bore} }}')
    found = faults(tmp_path, own)
    assert any("is no bore of a pipe of size 3 in" in fault.problem for fault in found)
    sound = faults(tmp_path, own.replace(f"= {bore} }}", "= 3.2 }"))
    assert not [fault for fault in sound if "bore" in fault.problem]


def test_a_bore_in_the_table_is_held_against_its_size(tmp_path: Path) -> None:
    pipes = PIPES.replace("fittings\n", "fittings,bore\n").replace("1 tee\n", "1 tee,\n")
    pipes = pipes.replace("lines,1,\n", "lines,1,,\n").replace("1 elbow 90\n", "1 elbow 90,20.67\n")
    (fault,) = faults(tmp_path, TABLE_PROJECT, pipes=pipes)
    assert fault.place.where == "row 4, column bore"


@pytest.mark.parametrize(("key", "what"), [("heads", "sprinkler"), ("closed_pipes", "pipe")])
def test_a_tag_named_twice_in_a_scenario_is_a_fault(tmp_path: Path, key: str, what: str) -> None:
    tag = "001" if key == "heads" else "T-002"
    text = TABLE_PROJECT + f'[[scenario]]\nname = "twice"\n{key} = ["{tag}", "{tag}"]\n'
    assert any(fault.problem == f"a {what} stands twice" for fault in faults(tmp_path, text))


def test_a_folder_in_the_place_of_a_file_leaves_everything_as_it_was(tmp_path: Path) -> None:
    (tmp_path / "review.pdf").mkdir()
    with pytest.raises(OSError, match=r"review\.pdf is a folder there"):
        write_files(tmp_path, {"result.json": b"{}", "review.pdf": b"%PDF"})
    assert not (tmp_path / "result.json").exists()


@pytest.mark.parametrize("encoding", ["cp1252", "latin-1", "ascii"])
def test_an_output_without_some_letters_still_gives_the_answer(tmp_path: Path, encoding: str) -> None:
    write(tmp_path)
    code = "from supplycheck.cli import run; run()"
    arguments = [sys.executable, "-X", "utf8=0", "-c", code, "check", str(tmp_path), "--no-files"]
    done = subprocess.run(arguments, capture_output=True, check=False, env={"PYTHONIOENCODING": encoding})
    assert done.returncode in (0, 1), done.stderr
    assert b"SUPPLY" in done.stdout


@pytest.mark.skipif(sys.platform == "win32", reason="closes a stream as a shell of Unix does")
def test_a_closed_error_stream_takes_nothing_from_the_answer(tmp_path: Path) -> None:
    write(tmp_path)
    code = "import sys; sys.stderr = None; from supplycheck.cli import run; run()"
    arguments = [sys.executable, "-c", code, "check", str(tmp_path), "--no-files"]
    done = subprocess.run(arguments, capture_output=True, check=False)
    assert done.returncode in (0, 1) and b"SUPPLY" in done.stdout
