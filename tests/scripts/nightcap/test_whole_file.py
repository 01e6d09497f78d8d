from pathlib import Path

import pytest

from nightcap.whole_file import whole_file, write_whole


def test_content_is_replaced(tmp_path: Path) -> None:
    write_whole(tmp_path / "f", b"one")
    write_whole(tmp_path / "f", b"two")
    assert (tmp_path / "f").read_bytes() == b"two"


def test_failure_half_way_leaves_the_old_file_and_no_draft(tmp_path: Path) -> None:
    write_whole(tmp_path / "f", b"old")
    with pytest.raises(OSError, match="disk full"), whole_file(tmp_path / "f") as file:  # noqa: PT012
        file.write(b"half of the n")
        raise OSError("disk full")
    assert (tmp_path / "f").read_bytes() == b"old"
    assert [path.name for path in tmp_path.iterdir()] == ["f"]


def test_name_appears_only_when_all_is_written(tmp_path: Path) -> None:
    with whole_file(tmp_path / "f") as file:
        file.write(b"content")
        assert not (tmp_path / "f").exists()
    assert (tmp_path / "f").exists()
