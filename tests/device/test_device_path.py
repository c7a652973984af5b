"""From a name to a rating file."""

import os
from pathlib import Path

import pytest

from soacheck.device.path import device_name, find_device, shipped_devices
from soacheck.errors import InputError
from tests.device.files import MOSFET, NPN


def put(folder: Path, name: str, text: str = NPN) -> Path:
    folder.mkdir(exist_ok=True)
    file = folder / name
    file.write_text(text, encoding="utf-8")
    return file


def refusal(name: str, folder: Path, *dirs: Path) -> str:
    with pytest.raises(InputError) as caught:
        find_device(name, folder, dirs)
    return str(caught.value)


def test_shipped_devices_are_found_by_their_stem(tmp_path: Path) -> None:
    found = find_device("EXAMPLE-NPN-160", tmp_path)
    assert found == shipped_devices() / "EXAMPLE-NPN-160.toml"
    assert found.is_file()


def test_stem_comes_before_name(tmp_path: Path) -> None:
    put(tmp_path, "other.toml")
    mine = put(tmp_path, "T1.toml", NPN.replace("T1", "something else"))
    assert find_device("T1", tmp_path) == mine


def test_name_in_the_file_is_found_when_no_stem_is(tmp_path: Path) -> None:
    mine = put(tmp_path, "drawer 3.toml")
    put(tmp_path, "another.toml", MOSFET)
    assert find_device("T1", tmp_path) == mine


def test_stage_folder_comes_before_given_folders_and_they_before_the_shipped(tmp_path: Path) -> None:
    name = "EXAMPLE-NPN-160"
    first, second = tmp_path / "first", tmp_path / "second"
    put(second, f"{name}.toml")
    first.mkdir()
    assert find_device(name, tmp_path, (first, second)) == second / f"{name}.toml"
    put(first, "by name.toml", NPN.replace("T1", name))
    assert find_device(name, tmp_path, (first, second)) == first / "by name.toml"
    put(tmp_path, f"{name}.toml")
    assert find_device(name, tmp_path, (first, second)) == tmp_path / f"{name}.toml"


def test_two_files_of_one_name_in_a_folder_are_both_named(tmp_path: Path) -> None:
    put(tmp_path, "a.toml")
    put(tmp_path, "b.toml")
    said = refusal("T1", tmp_path)
    assert "a.toml and b.toml" in said


def test_path_is_relative_to_the_stage_file(tmp_path: Path) -> None:
    mine = put(tmp_path / "parts", "x.toml")
    assert find_device("parts/x.toml", tmp_path) == mine
    assert find_device("../parts/x.toml", tmp_path / "parts").samefile(mine)
    assert "did you mean 'x.toml'" in refusal("parts/xx.toml", tmp_path)


def test_misspelt_name_gets_the_nearest_ones(tmp_path: Path) -> None:
    assert "did you mean 'EXAMPLE-NPN-160'" in refusal("EXAMPLE-NPN-16O", tmp_path)
    assert "did you mean 'EXAMPLE-NPN-160'" in refusal("example-npn-160", tmp_path)


def test_name_that_is_near_to_nothing_gets_a_list_and_the_folders(tmp_path: Path) -> None:
    said = refusal("zzz", tmp_path)
    assert "EXAMPLE-NIGBT-600" in said
    assert str(tmp_path) in said


@pytest.mark.parametrize("name", ["", ".", "..", "a\x00b", "x" * 5000, "[device]", "*", "x/" * 3000, "a\x00b.toml"])
def test_odd_names_are_refused_without_a_traceback(tmp_path: Path, name: str) -> None:
    refusal(name, tmp_path)


def test_absent_folder_is_an_input_error(tmp_path: Path) -> None:
    assert "not there" in refusal("T1", tmp_path, tmp_path / "nowhere")


def test_broken_and_odd_files_beside_it_do_not_disturb_the_search(tmp_path: Path) -> None:
    put(tmp_path, "broken.toml", "[device\nname = ")
    (tmp_path / "binary.toml").write_bytes(b"\xff\xfe\x00[device]")
    (tmp_path / "folder.toml").mkdir()
    os.mkfifo(tmp_path / "pipe.toml")
    (tmp_path / "dangling.toml").symlink_to(tmp_path / "gone.toml")
    put(tmp_path, "wrong.toml", "device = 3\n")
    mine = put(tmp_path, "good.toml")
    assert find_device("T1", tmp_path) == mine
    assert "no device of this name" in refusal("T9", tmp_path)


def test_rating_file_with_a_syntax_error_is_still_found_by_its_name(tmp_path: Path) -> None:
    broken = put(tmp_path, "mine.toml", NPN + "[thermal]\nR_th_jc = 1 K/W\n")
    assert device_name(broken) == "T1"
    assert find_device("T1", tmp_path) == broken


def test_stage_file_that_is_called_like_its_device_is_passed_over(tmp_path: Path) -> None:
    put(tmp_path, "EXAMPLE-NPN-160.toml", '[stage]\ndevice = "EXAMPLE-NPN-160"\n')
    assert find_device("EXAMPLE-NPN-160", tmp_path).parent == shipped_devices()


def test_a_list_of_known_devices_that_is_cut_says_how_many_are_left_out(tmp_path: Path) -> None:
    for number in range(30):
        (tmp_path / f"a{number:02}.toml").write_text(f'[device]\nname = "a{number:02}"\n', encoding="utf-8")
    with pytest.raises(InputError) as caught:
        find_device("zzzzzzzz", tmp_path)
    (problem,) = caught.value.problems
    assert "..." not in problem.remedy
    assert problem.remedy.endswith(" more")


def test_a_device_name_still_of_dots_is_not_looked_for(tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        find_device("...", tmp_path)
    assert caught.value.problems[0].problem == "not filled in"
