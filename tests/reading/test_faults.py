"""All faults in one run: of both files, in order, counted, quoted with care, no slip told twice."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.reading import read_circuit

if TYPE_CHECKING:
    from conftest import Files


class TestAllAtOnce:
    def test_both_files_in_line_order(self, files: Files) -> None:
        """Faults of form, across keys, of names and of rules come together, each file in its own order."""
        files.change('"-2.8 V"', '"-2.8 A"').change('"0.508 mm"', '"0.508"').change(
            '"Q1", "rf_out"]', '"Q9", "rf_out"]'
        )
        files.change('impedance = "95 ohm"', 'impedance = "95 ohm"\nwidth = "1 mm"').change(
            "points = 201", "pionts = 201"
        )
        files.change('undercut = "0 um"', "undercut = 0", rules=True).change(
            'density = "nominal"', "density = 2", rules=True
        )
        faults = files.faults()
        assert [fault.key for fault in faults] == [
            "design.pionts",
            "substrate.height",
            "ports.vg.voltage",
            "lines.gate_feed.width",
            "layout.spine[1]",
            "copper.undercut",
            "land_pattern.density",
        ]
        assert [fault.location.file for fault in faults] == [str(files.circuit)] * 5 + [str(files.rules)] * 2
        assert all(fault.location.line > 0 for fault in faults)

    def test_two_faults_in_one_table(self, files: Files) -> None:
        """A fault of one key does not hide that of two others together."""
        files.change('impedance = "95 ohm"\nangle = "90 deg"', 'angle = "90 V"\nlength = "1 mm"')
        assert [fault.key for fault in files.faults()] == [
            "lines.gate_feed.impedance",
            "lines.gate_feed.angle",
            "lines.gate_feed.length",
        ]

    def test_read_circuit_does_not_open_the_rules(self, files: Files) -> None:
        """The circuit alone can be read while its rules are not there."""
        files.rules.unlink()
        assert read_circuit(files.circuit).board.rules == "house.toml"

    def test_hundred_and_a_count(self, files: Files) -> None:
        """100 faults are listed, the rest are counted."""
        files.append("".join(f"[lines.x{number}]\nnets = 1\n" for number in range(130)))
        faults = files.faults()
        assert len(faults) == 101
        assert re.fullmatch(r"(\d+) more faults, not listed", faults[-1].found)
        assert faults[-1].found.startswith("290 ")  # nets, impedance and angle of each: 390

    def test_wrong_format_is_the_only_fault(self, files: Files) -> None:
        """A circuit file of another form is not judged by this one, and its rules are not read."""
        files.change("format = 1", "format = 2").change('"0.508 mm"', '"0.508 V"')
        files.change('undercut = "0 um"', "undercut = 0", rules=True)
        assert files.fault().key == "format"


class TestOneSlipOneFault:
    def test_misspelt_section(self, files: Files) -> None:
        """Elements in a table of a misspelt name are not missed by nets, hints and the spine."""
        assert files.change("[lines.gate_feed]", "[line.gate_feed]").fault().key == "line"

    def test_unknown_table_hides_no_dangling_net(self, files: Files) -> None:
        """A table that means nothing does not stop the check of nets."""
        files.change('["in", "a"]', '["in", "zz"]').append("[weather]\nrain = 1\n")
        assert {fault.key for fault in files.faults()} == {
            "weather",
            "parts.C1.nets[0]",
            "lines.series_in.nets[1]",
        }

    def test_renamed_net(self, files: Files) -> None:
        """Two spellings of one net are one fault that names both lines."""
        files.change('net = "out"', 'net = "outt"')
        fault = files.fault()
        assert '"out"' in fault.found
        assert f'"outt" (line {files.line("outt")})' in fault.allowed

    def test_misspelt_net_offers_the_nearest(self, files: Files) -> None:
        """A once-used net beside a busy one of nearly the same name."""
        fault = files.change('["g", "vg_rf"]', '["g", "vg_fr"]').fault()
        assert fault.key == "lines.gate_feed.nets[1]"
        assert '"vg_rf"' in fault.allowed

    def test_dangling_nets(self, files: Files) -> None:
        """Each net that ends nowhere is told."""
        files.append('[lines.lost]\nnets = ["alpha", "omega"]\nimpedance = "50 ohm"\nangle = "10 deg"\n')
        assert [fault.key for fault in files.faults()] == ["lines.lost.nets[0]", "lines.lost.nets[1]"]

    def test_unreadable_element_hides_no_other_piece(self, files: Files) -> None:
        """A line without nets excuses two once-used nets, not a whole lost piece of circuit beside them."""
        files.append('[lines.lost]\nnets = ["alpha", "omega"]\nimpedance = "50 ohm"\nangle = "10 deg"\n')
        files.append('[lines.lost2]\nnets = ["beta", "psi"]\nimpedance = "50 ohm"\nangle = "10 deg"\n')
        keys = [fault.key for fault in files.change('nets = ["g", "vg_rf"]\n', "").faults()]
        assert keys[0] == "lines.gate_feed.nets"
        assert {
            "lines.lost.nets[0]",
            "lines.lost.nets[1]",
            "lines.lost2.nets[0]",
            "lines.lost2.nets[1]",
        } < set(keys)

    def test_missing_nets_are_one_fault(self, files: Files) -> None:
        """What a line without nets leaves dangling is not told beside it."""
        assert files.change('nets = ["in", "a"]\n', "").fault().key == "lines.series_in.nets"

    def test_ground_once_is_no_dangling_net(self, files: Files) -> None:
        """gnd may be used once: it is the plane."""
        files.change('["b1", "gnd"]', '["b1", "a"]').read()

    @pytest.mark.parametrize(
        ("first", "second", "what"),
        [
            ("[parts.C2]", "[parts.series_in]", "a line"),
            ("[coupled.pickup]", "[coupled.rf_in]", "a port"),
            ("[lines.stub]", "[lines.C1]", "a line"),
        ],
    )
    def test_shared_name_space(self, files: Files, first: str, second: str, what: str) -> None:
        """A name borne by two elements is told at the later line and names the earlier."""
        fault = files.change(first, second).fault()
        name = second.strip("[]").split(".")[1]
        assert fault.found.startswith(f'"{name}", already the name of {what} at line ')
        assert fault.location.line > int(fault.found.rsplit(" ", 1)[1])
        assert fault.location.line == max(
            number
            for number, line in enumerate(files.circuit.read_text(encoding="utf-8").splitlines(), 1)
            if line.endswith(f".{name}]") and line.startswith(("[ports", "[lines", "[coupled", "[parts"))
        )

    def test_nets_and_footprints_have_their_own_name_space(self, files: Files) -> None:
        """A line may be named like a net or a footprint."""
        files.append('[lines.flange]\nnets = ["a"]\nimpedance = "50 ohm"\nangle = "10 deg"\n').read()

    def test_names_are_case_sensitive(self, files: Files) -> None:
        """c1 and C1 are two names."""
        files.append('[lines.c1]\nnets = ["a"]\nimpedance = "50 ohm"\nangle = "10 deg"\n').read()


class TestSupplyLines:
    def test_width_may_follow_from_current(self, files: Files) -> None:
        """A line between DC nets needs no width, also behind a choke."""
        files.change('nets = ["vg_rf", "vg"]', 'nets = ["vg_rf", "v1"]')
        files.append(
            '[parts.L1]\nkind = "inductor"\nnets = ["v1", "vg"]\nvalue = "10 nH"\ncase = "0603"\n'
        ).read()

    def test_not_at_an_rf_port(self, files: Files) -> None:
        """A line at an RF port carries a signal: its width must be told."""
        files.append('[lines.bias]\nnets = ["in", "vg"]\nlength = "free"\n')
        assert files.fault().key == "lines.bias.impedance"

    def test_not_without_a_supply(self, files: Files) -> None:
        """Behind a capacitor there is no DC port."""
        files.append('[lines.bias]\nnets = ["a", "a1"]\nlength = "free"\n')
        assert files.fault().key == "lines.bias.impedance"


class TestQuotes:
    SECRET = "secretabcdefghijklmnopqrstuvwxyz0123456789ABCDEFGHIJKLMNOPQRSTUVWXYZ-+.,;:_#'*~?!$%&/()=" * 2

    @pytest.mark.parametrize(
        ("old", "new"),
        [
            ('min_gap = "0.125 mm"', 'min_gap = "{}"'),
            ('name = "Two layers, invented class"', 'name = "{}{}"'),
            ("min_gap =", '"{}" ='),
            ("[waive.first-article]", '[waive."{}"]'),
            ('"fence.max_pitch" = "error"', '"{}" = "{}"'),
            ('"fence.max_pitch" = "error"', '"fence.max_pitch" = "{}"'),
            ('rule = "copper.min_gap"', 'rule = "{}"'),
            ('items = ["C1", "series_in"]', 'items = ["{}", 3]'),
            ('condition = "B2"', 'table = [["{}", "{}"]]'),
            ('condition = "B2"', 'table = ["{}"]'),
            ("[bank]", '["{}"]'),
            ("[bank]", '["{}"."{}"."{}"]'),
            ('until = "2027-06-30"', 'until = "2027-06-30"\n"{}" = 1\n"{}" = 2'),
            ('drills = ["0.3 mm", "0.4 mm", "2.7 mm"]', 'drills = "{}" x'),
            ("[bank]", '["{}"]\n["{}"]'),
            ("[bank]", "{}"),
            ('source = "invented example"', 'source = {{ "{}" = 1, "{}" = 2 }}'),
        ],
    )
    def test_forty_characters_of_another_file(self, files: Files, old: str, new: str) -> None:
        """However a rule file is faulty, no message repeats more than 40 characters of it, keys included."""
        files.change(old, new.replace("{}", self.SECRET).replace("{{", "{").replace("}}", "}"), rules=True)
        for fault in files.faults():
            message = str(fault).removeprefix(str(fault.location))
            assert _shown(message, self.SECRET) <= 40, message

    def test_passwd_as_rules(self, files: Files) -> None:
        """A rule file that is no rule file at all gives away nothing."""
        files.rules.write_text("root:x:0:0:root:/root:/bin/bash\n" * 20, encoding="utf-8")
        assert "bash" not in str(files.fault())

    @pytest.mark.parametrize("bad", ["\\u001b[31m", "\\u202e", "\\u2028", "\\u0085", "\\u007f"])
    def test_control_characters_are_escaped(self, files: Files, bad: str) -> None:
        """What a terminal would act on is printed as an escape."""
        message = str(files.change('"0.508 mm"', f'"{bad} mm"').fault())
        assert message.isprintable()
        assert "\\x" in message or "\\u" in message

    def test_long_values_are_cut(self, files: Files) -> None:
        """A quote of the circuit file is cut, too."""
        fault = files.change('"0.508 mm"', f'"{"1" * 500} mm"').fault()
        assert f'"{"1" * 40}..."' in fault.found

    def test_message_form(self, files: Files) -> None:
        """file:line: key path: found ...; allowed: ..."""
        message = str(files.change('"0.508 mm"', '"0.508 V"').fault())
        assert message.startswith(f"{files.circuit}:{files.line('0.508 V')}: substrate.height: found ")
        assert '; allowed: a length > 0 with its unit (mm, um, nm, m, mil, in), such as "0.5 mm"' in message

    def test_error_holds_the_faults(self, files: Files) -> None:
        """Scripts read the faults as values; the text joins them."""
        files.change('"0.508 mm"', '"0.508 V"').change('"35 um"', '"35 V"')
        with pytest.raises(WrongInputError) as caught:
            files.read()
        assert all(isinstance(fault, Fault) for fault in caught.value.faults)
        assert str(caught.value).count("\n") == 1
        assert caught.value.exit_status == 2


def _shown(message: str, secret: str) -> int:
    """Return how many characters of a message repeat the secret, in pieces of at least 4."""
    shown = position = 0
    plain = message.replace("\\", "")
    while position < len(plain):
        length = 0
        while position + length < len(plain) and plain[position : position + length + 1] in secret:
            length += 1
        shown += length if length >= 4 else 0
        position += max(length, 1)
    return shown
