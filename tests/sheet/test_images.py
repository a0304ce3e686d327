"""Images: files of the project that hold a picture and nothing that acts."""

from __future__ import annotations

import pytest

from loadpath.project import MemoryWorld, Refused
from loadpath.sheet.images import LARGEST_SVG, ImageRefused, check_svg, read_picture

SVG = '<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink">{}</svg>'
FILES = {
    "a.png": b"\x89PNG\r\n\x1a\nrest",
    "a.jpg": b"\xff\xd8\xff\xe0rest",
    "a.svg": SVG.format("<path d='M0 0'/>").encode(),
    "bom.svg": b"\xef\xbb\xbf\n" + SVG.format("").encode(),
    "png-inside.svg": b"\x89PNG\r\n\x1a\nrest",
    "a.gif": b"GIF89a",
    "a.txt": b"text",
    "bad.svg": SVG.format("<script/>").encode(),
    "big.svg": SVG.format("<!--" + "x" * LARGEST_SVG + "-->").encode(),
    "empty.png": b"",
}


@pytest.mark.parametrize(
    ("path", "media_type"),
    [
        ("a.png", "image/png"),
        ("a.jpg", "image/jpeg"),
        ("a.svg", "image/svg+xml"),
        ("bom.svg", "image/svg+xml"),
        ("png-inside.svg", "image/png"),
    ],
)
def test_the_type_is_told_by_what_the_file_holds(path: str, media_type: str) -> None:
    picture = read_picture(path, MemoryWorld(FILES))
    assert (picture.media_type, picture.data, str(picture.path)) == (media_type, FILES[path], path)


@pytest.mark.parametrize(
    ("address", "slug"),
    [
        ("", "image-path"),
        ("missing.png", "image-path"),
        ("../a.png", "image-path"),
        ("%2e%2e/a.png", "image-path"),
        ("/a.png", "image-path"),
        ("..%5Ca.png", "image-path"),
        ("https://tern.example/a.png", "image-path"),
        ("//tern.example/a.png", "image-path"),
        ("data:image/png;base64,AAAA", "image-path"),
        ("file:///etc/hostname", "image-path"),
        ("a.gif", "image-type"),
        ("a.txt", "image-type"),
        ("empty.png", "image-type"),
        ("bad.svg", "image-type"),
        ("big.svg", "over-limit"),
    ],
)
def test_other_images_are_refused(address: str, slug: str) -> None:
    with pytest.raises(ImageRefused) as refused:
        read_picture(address, MemoryWorld(FILES))
    assert refused.value.slug == slug
    assert refused.value.help


@pytest.mark.parametrize(
    "inside",
    [
        "<g id='a'/><use href='#a'/><use xlink:href='#a'/>",
        "<image href='data:image/png;base64,AAAA'/>",
        "<style>.a { fill: url(#p); stroke: url('#q') } /* url(http://x) */</style>",
        "<rect style='fill: url(#p)' clip-path='url(#c)'/>",
        "<text>a script on the slip: x &lt; y</text><!-- <script/> -->",
        "<metadata xmlns:r='urn:r'><r:rights>none</r:rights></metadata>",
        "<a href='#top'><path d='M0 0'/></a>",
    ],
)
def test_a_plain_drawing_is_let_through(inside: str) -> None:
    check_svg(SVG.format(inside).encode())


def test_a_bare_document_type_as_drawing_programs_write_it_is_let_through() -> None:
    head = '<?xml version="1.0"?>\n<!DOCTYPE svg PUBLIC "-//W3C//DTD SVG 1.1//EN" "svg11.dtd">\n'
    check_svg((head + SVG.format("")).encode())


@pytest.mark.parametrize(
    "inside",
    [
        "<script>alert(1)</script>",
        "<SCRIPT/>",
        "<x:script xmlns:x='http://www.w3.org/2000/svg'/>",
        "<x:script xmlns:x='urn:other'/>",
        "<g onclick='alert(1)'/>",
        "<g ONLOAD='alert(1)'/>",
        "<foreignObject/>",
        "<p xmlns='http://www.w3.org/1999/xhtml'/>",
        "<a href='javascript:alert(1)'/>",
        "<a xlink:href=' https://tern.example'/>",
        "<use href='other.svg#a'/>",
        "<image href='http://tern.example/a.png'/>",
        "<image href='data:image/svg+xml;base64,AAAA'/>",
        "<set attributeName='href' to='javascript:alert(1)'/>",
        "<animate attributeName='x'/>",
        "<style>@import 'a.css';</style>",
        "<style>.a { fill: url(http://tern.example/a) }</style>",
        "<style>.a { fill: u\\72l(http://tern.example/a) }</style>",
        "<style><![CDATA[ .a { fill: URL( 'a.svg#b' ) } ]]></style>",
        "<rect style='fill: url(a.svg#b)'/>",
        "<rect fill='url(a.svg#b)'/>",
        "<?xml-stylesheet href='a.css'?>",
        "<iframe/>",
    ],
)
def test_a_drawing_that_acts_or_loads_is_refused(inside: str) -> None:
    with pytest.raises(Refused):
        check_svg(SVG.format(inside).encode())


@pytest.mark.parametrize(
    "text",
    [
        "<!DOCTYPE svg [<!ENTITY a 'x'>]>" + SVG.format("&a;"),
        "<!DOCTYPE svg [<!ENTITY a SYSTEM 'file:///etc/hostname'>]>" + SVG.format("&a;"),
        SVG.format("&a;"),
        SVG.format("<g>"),
        "<html/>",
        "<svg/>",
        "<svg xmlns='http://www.w3.org/2000/svg'",
        "<?xml version='1.0' encoding='utf-7'?>" + SVG.format("+ADw-script/+AD4-") + "</g>",
    ],
)
def test_what_is_no_plain_svg_is_refused(text: str) -> None:
    with pytest.raises(Refused):
        check_svg(text.encode())


def test_bytes_that_are_no_text_are_refused() -> None:
    with pytest.raises(Refused, match="UTF-8"):
        check_svg(SVG.format("").encode("utf-16"))


def test_drawings_are_not_deep() -> None:
    check_svg(SVG.format("<g>" * 50 + "</g>" * 50).encode())
    with pytest.raises(Refused, match="deep"):
        check_svg(SVG.format("<g>" * 50_000 + "</g>" * 50_000).encode())


def test_repeats_within_repeats_are_refused() -> None:
    once = '<g id="a"><path d="M0 0h9"/></g><use href="#a"/><use href="#a"/>'
    check_svg(SVG.format(once).encode())
    with pytest.raises(Refused, match="repeats"):
        check_svg(SVG.format(once + '<g id="b"><use href="#a"/></g><use href="#b"/>').encode())
