"""Images of a sheet: files of the project that hold a picture and nothing that acts."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import PurePosixPath
from urllib.parse import unquote
from xml.parsers import expat

from loadpath.project import LARGEST_FILE, Refused, TooLarge, World

PNG, JPEG, SVG = "image/png", "image/jpeg", "image/svg+xml"
DEEPEST_SVG = 100
"""Elements of a drawing within one another."""
LARGEST_SVG = 2_000_000
"""Bytes of a drawing, which is read whole before it is let through."""

_SVG_SPACE = "http://www.w3.org/2000/svg"
_HTML_SPACE = "http://www.w3.org/1999/xhtml"
_ACTING = frozenset(
    {
        *("script", "handler", "listener", "foreignobject", "iframe", "embed", "object", "audio", "video"),
        *("set", "discard", "animate", "animatecolor", "animatemotion", "animatetransform"),
    }
)
"""Elements that run, move or load something."""
_ELSEWHERE = re.compile(r"//|[a-z][a-z0-9+.-]+:", re.IGNORECASE)
_LOADING = re.compile(r"@import|\\|url\(\s*(?!['\"]?\s*#)", re.IGNORECASE)
"""In a style: what loads a file, and the backslash that could hide it."""
_INSIDE = re.compile(r"\s*(#|data:image/(png|jpeg);base64,|$)")


class ImageRefused(Exception):
    """An image that is not let through: slug, message and mend of its finding."""

    def __init__(self, slug: str, message: str, help: str) -> None:
        super().__init__(message)
        self.slug, self.help = slug, help


@dataclass(frozen=True, slots=True)
class Picture:
    """An image file that was let through."""

    path: PurePosixPath
    """Relative to the sheet's folder."""
    media_type: str
    data: bytes


def image_path(address: str) -> PurePosixPath:
    """The path that a Markdown address states."""
    return PurePosixPath(unquote(address))


def read_picture(address: str, world: World) -> Picture:
    """The image at an address as Markdown gives it. Raises `ImageRefused`."""
    path = image_path(address)
    if not address:
        raise ImageRefused("image-path", "an image without a path", "write `![caption](sketch.png)`")
    if _ELSEWHERE.match(address):
        help = "save it in the project's folder and give its path there"
        raise ImageRefused(
            "image-path", "an image is read from the project's folder, not from an address", help
        )
    try:
        data = world.read(path, LARGEST_FILE)
    except TooLarge as refused:
        raise ImageRefused("over-limit", f"the image `{path}`: {refused}", "make it smaller") from None
    except Refused as refused:
        help = "give the path of a file in the project's folder, from the sheet's own"
        raise ImageRefused("image-path", f"the image `{path}` cannot be read: {refused}", help) from None
    return Picture(path, _media_type(data, path), data)


def _media_type(data: bytes, path: PurePosixPath) -> str:
    """Told by what the file holds, never by its name."""
    if data.startswith(b"\x89PNG\r\n\x1a\n"):
        return PNG
    if data.startswith(b"\xff\xd8\xff"):
        return JPEG
    if not data.removeprefix(b"\xef\xbb\xbf").lstrip().startswith(b"<"):
        message = f"`{path}` is not a PNG, JPEG or SVG file"
        raise ImageRefused("image-type", message, "save it as one of the three")
    if len(data) > LARGEST_SVG:
        message = f"the drawing `{path}` has more than {LARGEST_SVG // 1000} kB"
        raise ImageRefused("over-limit", message, "save it as PNG")
    try:
        check_svg(data)
    except Refused as refused:
        message = f"the drawing `{path}` is not let through: {refused}"
        raise ImageRefused("image-type", message, "save it as plain SVG, or as PNG") from None
    return SVG


# --- SVG ----------------------------------------------------------------------------------------------------


def check_svg(data: bytes) -> None:
    """Refuses a drawing that is more than a drawing: `Refused` says what it holds."""
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise Refused("it is not UTF-8 text") from None
    parser = expat.ParserCreate(namespace_separator=" ")
    drawing = _Drawing()
    drawing.watch(parser)
    try:
        parser.Parse(text, True)
        drawing.finish()
    except expat.ExpatError as error:
        raise Refused(f"it is not well-formed XML (line {error.lineno})") from None


class _Drawing:
    """Looks at every element, attribute and style, one after the other; nothing is kept."""

    def __init__(self) -> None:
        self.depth = 0
        self.in_style = False
        self.style: list[str] = []
        self.ids: list[str] = []
        """Of the elements that are open, "" for one without."""
        self.repeated: set[str] = set()
        """What a `use` repeats."""
        self.repeating: set[str] = set()
        """What holds a `use`."""

    def watch(self, parser: expat.XMLParserType) -> None:
        parser.StartElementHandler = self.start
        parser.EndElementHandler = self.end
        parser.CharacterDataHandler = self.text
        parser.ProcessingInstructionHandler = self.instruction
        parser.StartDoctypeDeclHandler = self.doctype
        parser.EntityDeclHandler = self.entity

    def start(self, name: str, attributes: dict[str, str]) -> None:
        space, _, local = name.rpartition(" ")
        if self.depth == 0 and (space, local) != (_SVG_SPACE, "svg"):
            raise Refused("it does not begin with an `svg` element")
        if local.lower() in _ACTING or space == _HTML_SPACE:
            raise Refused(f"it holds the element `{local}`")
        for key, value in attributes.items():
            self.attribute(key.rpartition(" ")[2].lower(), value)
        self.depth += 1
        if self.depth > DEEPEST_SVG:
            raise Refused(f"its elements lie more than {DEEPEST_SVG} deep")
        self.ids.append(attributes.get("id", ""))
        if local == "use":
            links = [value for key, value in attributes.items() if key.endswith("href")]
            self.repeated |= {link[1:] for link in links if link.startswith("#")}
            self.repeating |= set(self.ids)
        self.in_style, self.style = local.lower() == "style", []

    def attribute(self, name: str, value: str) -> None:
        if name.startswith("on"):
            raise Refused(f"it holds the event attribute `{name}`")
        if name in ("href", "src") and not _INSIDE.match(value):
            raise Refused(f"its `{name}` points out of the file")
        if name == "style" or "url(" in value.lower():
            self.css(value)

    def text(self, text: str) -> None:
        if self.in_style:
            self.style.append(text)

    def finish(self) -> None:
        """Repeats within repeats multiply: a small file of them stops a browser."""
        if (self.repeated & self.repeating) - {""}:
            raise Refused("a `use` repeats what holds a `use`")

    def end(self, _name: str) -> None:
        self.depth -= 1
        self.ids.pop()
        if self.in_style:
            self.css("".join(self.style))
        self.in_style = False

    def css(self, text: str) -> None:
        if _LOADING.search(re.sub(r"/\*.*?\*/", "", text, flags=re.DOTALL)):
            raise Refused("its style loads another file")

    def instruction(self, target: str, _data: str) -> None:
        raise Refused(f"it holds the instruction `{target}`")

    def doctype(self, _name: str, _system: str | None, _public: str | None, has_subset: bool) -> None:
        # a bare DOCTYPE, as drawing programs write it, names a file that nothing ever opens
        if has_subset:
            raise Refused("it declares a document type of its own")

    def entity(self, *_declaration: object) -> None:
        raise Refused("it declares entities")
