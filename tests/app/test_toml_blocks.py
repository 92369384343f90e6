"""Sections of a TOML text as blocks of lines."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from app.toml_blocks import Block, blocks_of, joined, with_lines

TEXT = """\
# about the file

# about one
[one] # x
a = 1

[[ two . three ]]
b = [
  ["x", "y"],
]
# about four, line 1
# line 2
[four]
c = 2
# the end
"""


def test_comments_right_above_a_header_belong_to_it() -> None:
    blocks = blocks_of(TEXT)
    assert [block.path for block in blocks] == ["", "one", "two.three", "four"]
    assert blocks[0].text == "# about the file\n\n"
    assert blocks[1].text == "# about one\n[one] # x\na = 1\n\n"
    assert blocks[3].text == "# about four, line 1\n# line 2\n[four]\nc = 2\n# the end\n"


def test_comments_that_open_the_file_are_about_the_file() -> None:
    assert blocks_of("# mine\n[one]\n")[0].text == "# mine\n"


@given(st.lists(st.sampled_from(["# c", "", "[a]", "[[b.c]]", "x = 1", " [ d ] # e", "[1, 2],", "\u2028[a]", "\r"])))
def test_blocks_are_the_text_in_parts(lines: list[str]) -> None:
    for text in ("\n".join(lines), "\r\n".join(lines), "".join(f"{line}\n" for line in lines)):
        blocks = blocks_of(text)
        assert "".join(block.text for block in blocks) == text
        assert joined(blocks, blocks) == text


def test_blocks_that_come_together_are_set_apart_as_the_others_are() -> None:
    before = blocks_of("[a]\nx = 1\n\n[b]\ny = 2\n\n[c]\nz = 3")
    _, a, b, c = before
    assert joined([c, b, a], before) == "[c]\nz = 3\n\n[b]\ny = 2\n\n[a]\nx = 1\n"
    assert joined([a, Block("n", "[n]\nm = 4\n"), c], before) == "[a]\nx = 1\n\n[n]\nm = 4\n\n[c]\nz = 3"
    close = blocks_of("[a]\r\nx = 1\r\n[b]\r\ny = 2\r\n")
    assert joined([close[2], close[1], Block("n", "[n]\n")], close) == "[b]\r\ny = 2\r\n[a]\r\nx = 1\r\n[n]\r\n"


def test_lines_come_after_the_last_entry_or_under_the_header() -> None:
    block = Block("a", "# c\n[a]\nx = 1\n\n# end\n")
    assert with_lines(block, ["y = 2", "z = 3"]).text == "# c\n[a]\nx = 1\ny = 2\nz = 3\n\n# end\n"
    assert with_lines(block, ["y = 2"], first=True).text == "# c\n[a]\ny = 2\nx = 1\n\n# end\n"
    assert with_lines(block, []) is block
    assert with_lines(Block("a", "[a]"), ["y = 2"]).text == "[a]\ny = 2\n"
    assert with_lines(Block("a", "[a]\r\n"), ["y = 2"]).text == "[a]\r\ny = 2\r\n"
