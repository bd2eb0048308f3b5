"""Statements between braces and semicolons: the same groups however a text is laid out."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.intake.names import read_names
from auditor.intake.names_blocks import Blocks, pieces


def _found(text: str) -> list[tuple[str, int, int]]:
    return [
        (item.name, item.place.line, item.place.column)
        for item in read_names(text, "etc/config").declarations
    ]


ONE_LINE = {
    "server { listen 443 ssl; ssl_ecdh_curve X25519:ffdhe2048; }": ["ffdhe2048"],
    "server{listen 443;ssl_ecdh_curve X25519:ffdhe2048;}": ["ffdhe2048"],
    "ssl_ecdh_curve X25519:ffdhe2048; ssl_session_tickets off;": ["ffdhe2048"],
    "sainfo anonymous { pfs_group modp768; }": ["modp768"],
    "children { net { esp_proposals = aes256gcm16-modp1024 } }": ["modp1024"],
    "remote x { proposal { hash_algorithm sha1; dh_group 2; } }": ["dh_group 2"],
    "remote x { } sainfo y { pfs_group modp1536; } a { b; }": ["modp1536"],
    '{"port": 22, "kex": ["ecdh-sha2-nistp256", "diffie-hellman-group14-sha1"]}': [
        "diffie-hellman-group14-sha1"
    ],
    "ssh: {port: 22, kex: [diffie-hellman-group14-sha256, curve25519-sha256]}": [
        "diffie-hellman-group14-sha256"
    ],
    "tls.createServer({ key, groups: 'X25519:ffdhe3072' })": ["ffdhe3072"],
    "a { b ${X}; groups ffdhe2048; }": ["ffdhe2048"],
    "a { b 'it; { '; groups ffdhe2048; }": ["ffdhe2048"],
    "a { b don't; groups ffdhe2048; }": ["ffdhe2048"],
    "a { /* groups ffdhe3072; */ groups ffdhe2048; } # groups ffdhe4096;": ["ffdhe2048"],
    "a { dh_group 14; dh_group 5; }": ["dh_group 14", "dh_group 5"],
    "export A=1;kex=diffie-hellman-group14-sha1;b": ["diffie-hellman-group14-sha1"],
}


@pytest.mark.parametrize("text", ONE_LINE)
def test_statements_on_one_line(text: str) -> None:
    """Each has the line and the column of its text."""
    found = _found(f"\n{text}\n")
    assert [name for name, _, _ in found] == ONE_LINE[text]
    for name, line, column in found:
        assert line == 2
        assert text[column - 1 :].startswith(name.split()[-1])


@pytest.mark.parametrize(
    "text",
    [
        "Groups = X25519 ; groups = ffdhe2048",
        "name = x ;dh_group = 2",
        "the old gear is slow; dh group 2",
        "x = '{ groups ffdhe2048; }'",
        'log_format main "a; ssl_ecdh_curve ffdhe2048;";',
        "a { b; /* groups ffdhe3072; */ }",
        "a { b; # groups ffdhe3072; }",
        "${dh_group:-2}",
        "a, groups: ffdhe2048 are fine",
        "a { groups -ffdhe2048; }",
    ],
)
def test_marks_that_leave_doubt(text: str) -> None:
    """Semicolons of comments and of prose, quotes and variables begin no statement."""
    assert read_names(text, "etc/config").empty


def test_a_list_in_a_block_goes_on_below() -> None:
    """The last piece of a line is continued as a line would be; others are not."""
    text = "a { kex = ecdh-sha2-nistp256, \\\n  diffie-hellman-group14-sha1\n}\n"
    assert _found(text) == [("diffie-hellman-group14-sha1", 2, 3)]
    assert _found("a { groups = x25519, }\n ffdhe2048\n") == []


GROUP = st.sampled_from(["modp768", "modp1024", "modp1536", "modp2048", "modp3072"])
STATEMENT = st.one_of(
    GROUP.map(lambda group: f"pfs_group {group}"),
    GROUP.map(lambda group: f"esp_proposals = aes256-{group}"),
    st.sampled_from(["lifetime time 2 min", "log 'a; b'", "version = 2", "x ${y}"]),
)
Tree = list["str | tuple[str, Tree]"]
TREE = st.recursive(
    st.lists(STATEMENT, min_size=1, max_size=3),
    lambda inner: st.lists(
        STATEMENT | st.tuples(st.sampled_from(["sainfo a", "connections", "gw", "x"]), inner),
        min_size=1,
        max_size=3,
    ),
    max_leaves=8,
)


def _laid_out(tree: "Tree", end: str, depth: int = 1) -> str:
    """The tree with ``end`` behind each statement and brace."""
    parts = []
    for item in tree:
        if isinstance(item, str):
            parts.append(f"{item};{end}")
        else:
            parts.append(f"{item[0]} {{{end}{_laid_out(item[1], end, depth + 1)}}}{end}")
    return "".join(parts)


@given(TREE)
def test_the_layout_moves_nothing(tree: "Tree") -> None:
    """On one line or with each statement on its own: the same groups with the same protocols."""
    readings = [read_names(f"top {{{end}{_laid_out(tree, end)}}}", "c") for end in (" ", "\n  ")]
    one_line, many = (
        [(item.modulus, item.protocol) for item in reading.declarations] for reading in readings
    )
    assert one_line == many
    groups = _laid_out(tree, " ").count("modp")
    assert len(one_line) == groups


@given(st.lists(st.sampled_from(list("{};,\"'$\\ab: #")), max_size=40).map("".join))
def test_pieces_and_marks_are_the_line(line: str) -> None:
    """Nothing is lost between them, and each piece stands where it says."""
    found = list(pieces(line))
    assert line == "".join(piece.opened + piece.text for piece in found)
    assert all(line.startswith(piece.text, piece.shift) for piece in found)
    assert found[0].opened == found[-1].closed == ""


def test_closing_braces_close_no_more_than_was_opened() -> None:
    """Stray ones are passed over, and beyond the bound blocks are counted without a heading."""
    blocks = Blocks()
    for piece in pieces("} } a { b {"):
        blocks.after(piece)
    assert [scope.heading for scope in blocks.scopes] == ["a", "b"]
    for piece in pieces("{" * 200 + "}" * 201):
        blocks.after(piece)
    assert [scope.heading for scope in blocks.scopes] == ["a"]
