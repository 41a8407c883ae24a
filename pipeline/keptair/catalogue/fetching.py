"""Catalogues that lie elsewhere (https, http, s3), fetched to a temporary file before anything is read."""

from __future__ import annotations

import os
import re
import shutil
import tempfile
from base64 import b64encode
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from urllib.parse import SplitResult, unquote, urlsplit, urlunsplit

from keptair import __version__
from keptair.catalogue.showing import shown
from keptair.errors import CatalogueError

TIMEOUT = 60  # seconds without a byte
CHUNK = 1 << 20
SECRET = re.compile(r"(?<=[?&])([^=&]*(?:key|token|sig|secret|credential|password|auth)[^=&]*=)[^&]*", re.IGNORECASE)


def is_elsewhere(source: str) -> bool:
    """Whether the catalogue has to be fetched."""
    scheme, mark, _ = source.partition("://")
    if not mark:
        return False
    try:
        urlsplit(source)
    except ValueError as error:
        raise CatalogueError(f"the catalogue's address cannot be read ({error})") from None
    if scheme.lower() not in ("http", "https", "s3"):
        raise CatalogueError(
            f"{without_secrets(source)}: give a path, or an address that begins with https:// or s3://"
        )
    return True


def without_secrets(source: str) -> str:
    """The address as it may be shown and kept: no user, password, key or signature."""
    plain = urlunsplit(_split_off_user(source)[0]._replace(fragment=""))
    return SECRET.sub(r"\1...", plain)


def _split_off_user(source: str) -> tuple[SplitResult, str]:
    """The address without its user and password, and these."""
    parts = urlsplit(source)
    user, _, host = parts.netloc.rpartition("@")
    return parts._replace(netloc=host), user


@contextmanager
def temporary_folder() -> Iterator[Path]:
    """A folder for what is fetched; it stays if all goes well, for the catalogue to be read again."""
    folder = Path(tempfile.mkdtemp(prefix="keptair-"))
    try:
        yield folder
    except BaseException:
        shutil.rmtree(folder, ignore_errors=True)
        raise


def fetch(source: str, folder: Path) -> Path:
    """The whole catalogue, or an error in one sentence."""
    name = re.sub(r"[^\w.+-]", "_", unquote(urlsplit(source).path.rpartition("/")[2]))[-100:].lstrip(".")
    target = folder / (name or "catalogue")
    if source.lower().startswith("s3://"):
        _from_s3(source, target)
    else:
        _from_web(source, target)
    return target


def _from_web(source: str, target: Path) -> None:
    from http.client import HTTPException
    from urllib.error import HTTPError, URLError
    from urllib.request import Request, urlopen

    try:
        parts, user = _split_off_user(source)
        request = Request(urlunsplit(parts._replace(fragment="")), headers={"User-Agent": f"keptair/{__version__}"})
        if user:
            request.add_unredirected_header("Authorization", f"Basic {b64encode(unquote(user).encode()).decode()}")
        with urlopen(request, timeout=TIMEOUT) as answer, target.open("wb") as file:
            promised = answer.headers.get("Content-Length")
            shutil.copyfileobj(answer, file, CHUNK)
    except HTTPError as error:
        error.close()
        raise _failure(source, f"the server answered {error.code} {error.reason}") from None
    except URLError as error:
        raise _failure(source, error.reason) from None
    except (OSError, HTTPException, ValueError) as error:
        raise _failure(source, str(error) or type(error).__name__) from None
    received = target.stat().st_size
    if promised and promised.isdigit() and int(promised) != received:
        raise _failure(source, f"{received} of {promised} bytes came, then the connection ended")


def _from_s3(source: str, target: Path) -> None:
    """With the credentials, region and endpoint of the usual AWS_* variables and files."""
    from pyarrow import fs

    parts = urlsplit(source)
    endpoint = os.environ.get("AWS_ENDPOINT_URL_S3") or os.environ.get("AWS_ENDPOINT_URL")
    region = os.environ.get("AWS_REGION") or os.environ.get("AWS_DEFAULT_REGION")
    try:
        if not endpoint and not region:
            region = fs.resolve_s3_region(parts.netloc)
        store = fs.S3FileSystem(
            endpoint_override=endpoint, region=region, connect_timeout=TIMEOUT, request_timeout=TIMEOUT
        )
        with store.open_input_stream(parts.netloc + unquote(parts.path)) as answer, target.open("wb") as file:
            shutil.copyfileobj(answer, file, CHUNK)
    except FileNotFoundError:
        raise _failure(source, "there is no such object") from None
    except (OSError, ValueError) as error:
        raise _failure(source, error) from None


def _failure(source: str, reason: object) -> CatalogueError:
    sentence = shown(str(reason).split("\n")[0], 200)
    return CatalogueError(f"{without_secrets(source)}: cannot be fetched ({sentence})")
