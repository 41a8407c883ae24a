"""Catalogues that lie elsewhere, from servers on this machine."""

from __future__ import annotations

import base64
import gc
import gzip
import http.server
import threading
import urllib.request
from collections.abc import Iterator
from pathlib import Path

import pytest

from keptair.catalogue import fetching, open_catalogue
from keptair.errors import CatalogueError

CATALOGUE = b"planet_id,k_mag\nAsha b,7.5\n"


class Pages(http.server.BaseHTTPRequestHandler):
    """A few pages, good and bad."""

    def do_GET(self) -> None:
        path = self.path.split("?")[0]
        if path == "/planets.csv":
            self._answer(200, CATALOGUE)
        elif path == "/planets.csv.gz":
            self._answer(200, gzip.compress(CATALOGUE))
        elif path == "/moved":
            self.send_response(302)
            self.send_header("Location", "/planets.csv")
            self.end_headers()
        elif path == "/to-file":
            self.send_response(302)
            self.send_header("Location", "file:///etc/hostname")
            self.end_headers()
        elif path == "/short":
            self._answer(200, CATALOGUE, promised=len(CATALOGUE) + 100)
        elif path == "/page":
            self._answer(200, b"<!DOCTYPE html><p>Log in")
        elif path == "/private":
            known = self.headers.get("Authorization") == "Basic " + base64.b64encode(b"ada:p@ss").decode()
            self._answer(200 if known else 401, CATALOGUE if known else b"")
        else:
            self._answer(404, b"no such page")

    def _answer(self, code: int, content: bytes, promised: int | None = None) -> None:
        self.send_response(code)
        self.send_header("Content-Length", str(len(content) if promised is None else promised))
        self.end_headers()
        self.wfile.write(content)

    def log_message(self, *_: object) -> None:
        """Silence."""


@pytest.fixture
def site() -> Iterator[str]:
    """The address of a web server."""
    server = http.server.ThreadingHTTPServer(("127.0.0.1", 0), Pages)
    thread = threading.Thread(target=server.serve_forever, kwargs={"poll_interval": 0.01})
    thread.start()
    yield f"http://127.0.0.1:{server.server_port}"
    server.shutdown()
    thread.join()
    server.server_close()


@pytest.fixture
def temporary(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Where temporary files go, empty."""
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    return tmp_path


@pytest.mark.parametrize("page", ["/planets.csv", "/planets.csv.gz", "/moved", "/planets.csv?night=12&token=abc"])
def test_a_catalogue_of_the_web_is_fetched_and_read_as_often_as_asked(site: str, page: str, temporary: Path) -> None:
    catalogue = open_catalogue(site + page)
    for _ in range(2):
        [batch] = catalogue.batches(10)
        assert batch.columns["read.k_mag"].tolist() == [7.5]
    assert catalogue.source == (site + page).replace("abc", "...")
    assert list(temporary.iterdir())
    del catalogue
    gc.collect()
    assert not list(temporary.iterdir())


@pytest.mark.usefixtures("temporary")
def test_user_and_password_are_used_and_never_shown(site: str) -> None:
    address = site.replace("http://", "http://ada:p%40ss@") + "/private"
    catalogue = open_catalogue(address)
    assert catalogue.source == site + "/private"
    with pytest.raises(CatalogueError) as failure:
        open_catalogue(address.replace("ada", "eve"))
    assert str(failure.value) == f"{site}/private: cannot be fetched (the server answered 401 Unauthorized)"


@pytest.mark.parametrize(
    ("page", "reason"),
    [
        ("/nowhere", "the server answered 404 Not Found"),
        ("/short", "27 of 127 bytes came, then the connection ended"),
        ("/to-file", "cannot be fetched"),
        ("/page", "is a web page, not a table"),
    ],
)
def test_what_cannot_be_fetched_is_one_sentence_and_leaves_nothing(
    site: str, page: str, reason: str, temporary: Path
) -> None:
    with pytest.raises(CatalogueError, match=reason) as failure:
        open_catalogue(site + page)
    assert failure.value.exit_code == 3
    assert len(str(failure.value).splitlines()) == 1
    assert not list(temporary.iterdir())


@pytest.mark.parametrize(
    ("address", "reason"),
    [
        ("http://127.0.0.1:1/x.csv", "cannot be fetched"),
        ("https:///x.csv", "no host given"),
        ("http://[::1", "address cannot be read"),
        ("ftp://example.org/x.csv", "begins with https:// or s3://"),
        ("file:///etc/hostname", "begins with https:// or s3://"),
        ("http://a b/c", "cannot be fetched"),
    ],
)
def test_an_address_that_leads_nowhere_is_one_sentence(address: str, reason: str, temporary: Path) -> None:
    with pytest.raises(CatalogueError, match=reason):
        open_catalogue(address)
    assert not list(temporary.iterdir())


@pytest.mark.parametrize(
    ("address", "shown"),
    [
        ("https://u:p@example.org/a?b=1", "https://example.org/a?b=1"),
        ("https://example.org/a?X-Amz-Signature=12&q=x", "https://example.org/a?X-Amz-Signature=...&q=x"),
        ("https://example.org/a?api_key=12#top", "https://example.org/a?api_key=..."),
        ("s3://bucket/night/planets.csv", "s3://bucket/night/planets.csv"),
    ],
)
def test_addresses_are_shown_without_their_secrets(address: str, shown: str) -> None:
    assert fetching.without_secrets(address) == shown


@pytest.fixture
def bucket(monkeypatch: pytest.MonkeyPatch) -> Iterator[str]:
    """An object store with one bucket and one object."""
    from moto.server import ThreadedMotoServer

    server = ThreadedMotoServer(ip_address="127.0.0.1", port=0, verbose=False)
    server.start()
    host, port = server.get_host_and_port()
    for name, value in {
        "AWS_ENDPOINT_URL": f"http://{host}:{port}",
        "AWS_ACCESS_KEY_ID": "nobody",
        "AWS_SECRET_ACCESS_KEY": "nothing",
        "AWS_REGION": "us-east-1",
        "AWS_EC2_METADATA_DISABLED": "true",
    }.items():
        monkeypatch.setenv(name, value)
    for path, content in (("nights", b""), ("nights/a night/planets.csv", CATALOGUE)):
        address = f"http://{host}:{port}/{path.replace(' ', '%20')}"
        request = urllib.request.Request(address, content, {"Content-Type": "text/csv"}, method="PUT")
        urllib.request.urlopen(request).close()
    yield "s3://nights"
    server.stop()


@pytest.mark.usefixtures("temporary")
def test_an_object_of_a_store_is_fetched_or_missed_in_one_sentence(bucket: str) -> None:
    catalogue = open_catalogue(f"{bucket}/a night/planets.csv")
    [batch] = catalogue.batches(10)
    assert batch.columns["read.planet_id"].tolist() == ["Asha b"]
    with pytest.raises(CatalogueError, match="there is no such object"):
        open_catalogue(f"{bucket}/nothing.csv")
    with pytest.raises(CatalogueError, match="cannot be fetched"):
        open_catalogue(bucket)
