"""Data files of parts: what is wrong with them is said, never guessed over, and never extrapolated."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from layoutgen.response.touchstone import UnusableDataError, largest_gain, read_part_data

HEAD = "! invented data\n# GHz S RI R 50\n"
ROW = "{f} 0.1 0.0 0.9 -0.1 0.9 -0.1 0.1 0.0\n"


def written(folder: Path, text: str, name: str = "c1.s2p") -> Path:
    path = folder / name
    path.write_text(text)
    return path


def good(folder: Path, frequencies: list[float]) -> Path:
    return written(folder, HEAD + "".join(ROW.format(f=f) for f in frequencies))


class TestForms:
    def test_order_of_a_two_port(self, tmp_path: Path) -> None:
        """Version 1 writes S11 S21 S12 S22: the middle two exchanged is the classic fault."""
        text = HEAD + "1 0.1 0 0.2 0 0.3 0 0.4 0\n2 0.1 0 0.2 0 0.3 0 0.4 0\n"
        data = read_part_data(written(tmp_path, text), (2,))
        assert data.s[0].real == pytest.approx(np.array([[0.1, 0.3], [0.2, 0.4]]))
        assert data.frequencies == pytest.approx([1e9, 2e9])

    def test_magnitude_angle_and_reference(self, tmp_path: Path) -> None:
        data = read_part_data(written(tmp_path, "# MHz S MA R 75\n100 0.5 90\n200 0.5 -90\n", "c1.s1p"), (1,))
        assert data.s[:, 0, 0] == pytest.approx([0.5j, -0.5j])
        assert data.z0 == pytest.approx([75.0])
        assert data.frequencies == pytest.approx([1e8, 2e8])

    def test_impedances_become_s(self, tmp_path: Path) -> None:
        """Version 1 impedances are over the reference: z = 2 is 100 ohm, a reflection of 1/3."""
        data = read_part_data(
            written(tmp_path, "# GHz Z RI R 50\n1 2 0\n2 2 0\n", "c1.z1p".replace("z", "s")), (1,)
        )
        assert data.s[:, 0, 0] == pytest.approx([1.0 / 3.0, 1.0 / 3.0])

    def test_version_two(self, tmp_path: Path) -> None:
        text = (
            "[Version] 2.0\n# GHz S RI R 50\n[Number of Ports] 2\n[Two-Port Data Order] 12_21\n"
            "[Number of Frequencies] 2\n[Reference] 50 50\n[Network Data]\n"
            "1 0.1 0 0.2 0 0.3 0 0.4 0\n2 0.1 0 0.2 0 0.3 0 0.4 0\n[End]\n"
        )
        data = read_part_data(written(tmp_path, text, "c1.ts"), (2,))
        assert data.s[0].real == pytest.approx(np.array([[0.1, 0.2], [0.3, 0.4]]))

    def test_noise_data_behind_the_network_data(self, tmp_path: Path) -> None:
        text = HEAD + ROW.format(f=1) + ROW.format(f=2) + "1 0.5 0.3 20 0.1\n2 0.6 0.3 25 0.1\n"
        assert read_part_data(written(tmp_path, text), (2,)).frequencies.size == 2

    def test_latin_comments_and_line_ends(self, tmp_path: Path) -> None:
        path = tmp_path / "c1.s2p"
        text = HEAD + ROW.format(f=1) + ROW.format(f=2)
        path.write_bytes(b"! 25 \xb0C\r\n" + text.replace("\n", "\r\n").encode())
        assert read_part_data(path, (2,)).frequencies.size == 2


class TestFaults:
    @pytest.mark.parametrize(
        ("text", "found"),
        [
            ("", "no option line"),
            ("# GHz S RI R 50\n", "no data"),
            (HEAD + "1 0.1 0 0.9 0 0.9\n", "breaks off"),
            (HEAD + ROW.format(f=1) + ROW.format(f=2)[:20] + "\n", "breaks off"),
            (HEAD + "".join(ROW.format(f=f) for f in (1, 3, 2)), "out of order"),
            (HEAD + "".join(ROW.format(f=f) for f in (1, 2, 2)), "out of order"),
            (HEAD + "".join(ROW.format(f=f) for f in (3, 2, 1)), "out of order"),
            (HEAD + ROW.format(f=1), "single frequency"),
            (HEAD + ROW.format(f=1) + ROW.format(f=2).replace("0.9", "nan"), "no finite numbers"),
            (HEAD + ROW.format(f=1) + "2 hello 0 0 0 0 0 0 0\n", "breaks off"),
            ("# THz S RI R 50\n" + ROW.format(f=1) + ROW.format(f=2), "breaks off"),
            ("# GHz S RI R -50\n" + ROW.format(f=1) + ROW.format(f=2), "reference impedance"),
        ],
    )
    def test_faulty_text(self, tmp_path: Path, text: str, found: str) -> None:
        with pytest.raises(UnusableDataError, match=found):
            read_part_data(written(tmp_path, text), (2,))

    def test_fewer_frequencies_than_announced(self, tmp_path: Path) -> None:
        """A version 2 file cut off after a whole row."""
        text = (
            "[Version] 2.0\n# GHz S RI R 50\n[Number of Ports] 1\n[Number of Frequencies] 3\n"
            "[Network Data]\n1 0.1 0\n2 0.1 0\n"
        )
        with pytest.raises(UnusableDataError, match="announces 3"):
            read_part_data(written(tmp_path, text, "c1.ts"), (1,))

    def test_another_number_of_ports(self, tmp_path: Path) -> None:
        path = good(tmp_path, [1, 2])
        with pytest.raises(UnusableDataError, match=r"found a file of 2 ports.*allowed: 1 port$"):
            read_part_data(path, (1,))

    def test_a_name_that_promises_too_little(self, tmp_path: Path) -> None:
        """Two-port rows under a one-port's name."""
        with pytest.raises(UnusableDataError):
            read_part_data(written(tmp_path, HEAD + ROW.format(f=1) + ROW.format(f=2), "c1.s1p"), (1,))

    def test_missing_directory_binary_large(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        with pytest.raises(UnusableDataError, match="No such file"):
            read_part_data(tmp_path / "none.s2p", (2,))
        (tmp_path / "folder.s2p").mkdir()
        with pytest.raises(UnusableDataError, match="directory"):
            read_part_data(tmp_path / "folder.s2p", (2,))
        (tmp_path / "binary.s2p").write_bytes(b"# GHz S RI R 50\n\x00\x01")
        with pytest.raises(UnusableDataError, match="binary"):
            read_part_data(tmp_path / "binary.s2p", (2,))
        monkeypatch.setattr("layoutgen.response.touchstone.MAX_BYTES", 10)
        with pytest.raises(UnusableDataError, match="MB"):
            read_part_data(good(tmp_path, [1, 2]), (2,))

    def test_a_message_quotes_little(self, tmp_path: Path) -> None:
        with pytest.raises(UnusableDataError) as raised:
            read_part_data(written(tmp_path, HEAD + "1 " + "secret" * 50 + "\n"), (2,))
        assert "secret" * 7 not in raised.value.found


class TestBetweenPoints:
    def test_linear_and_passive(self, tmp_path: Path) -> None:
        data = read_part_data(written(tmp_path, "# GHz S RI R 50\n1 1 0\n2 0 1\n", "c1.s1p"), (1,))
        s = data.at(np.array([1e9, 1.25e9, 2e9]))
        assert s[:, 0, 0] == pytest.approx([1.0, 0.75 + 0.25j, 1.0j])

    @pytest.mark.parametrize("f", [0.99e9, 2.01e9])
    def test_never_beyond(self, tmp_path: Path, f: float) -> None:
        with pytest.raises(ValueError, match="outside the data"):
            read_part_data(good(tmp_path, [1, 2]), (2,)).at(np.array([f]))

    def test_the_ends_count_in_spite_of_rounding(self, tmp_path: Path) -> None:
        """2.29 GHz times 1e9 is not 2290e6 in floating point."""
        data = read_part_data(good(tmp_path, [2.20, 2.29]), (2,))
        assert np.all(data.covers(np.array([2200e6, 2290e6])))
        assert np.all(np.isfinite(data.at(np.array([2200e6, 2290e6]))))

    def test_largest_gain(self, tmp_path: Path) -> None:
        data = read_part_data(written(tmp_path, "# GHz S RI R 50\n1 0.5 0\n2 0 1.25\n", "c1.s1p"), (1,))
        assert largest_gain(data) == pytest.approx((1.25, 2e9))


def test_scikit_rf_is_not_imported_without_data() -> None:
    """It costs 0.2 s of start-up."""
    code = "import layoutgen.response, sys; sys.exit('skrf' in sys.modules or 'scipy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
