"""The pages work without any other host."""

import re

import pytest

LINK = re.compile(r"""(?:href|src)=["']([^"']+)["']""")
ADDRESS = re.compile(r"""https?://[^"'\s<>)]+""")


@pytest.fixture(params=["/", "/docs"])
def page(request, server):
    answer = server.client.get(request.param)
    assert answer.status_code == 200
    assert answer.headers["content-type"] == "text/html; charset=utf-8"
    return answer


def test_a_page_names_no_other_host(page, server):
    for address in ADDRESS.findall(page.text):
        assert address.startswith(server.base_url)


def test_every_link_of_a_page_leads_somewhere(page, server):
    for link in LINK.findall(page.text):
        if not link.startswith("data:"):
            assert server.client.get(page.url.join(link)).status_code == 200, link


def test_a_browser_is_told_to_load_nothing_from_elsewhere(page):
    policy = page.headers["content-security-policy"]
    assert policy.startswith("default-src 'none'")
    assert "http" not in policy
    assert "script-src" not in policy or "script-src 'self';" in policy


def test_the_start_page_shows_a_command_for_this_host(server):
    assert f"curl -s {server.base_url}/v1/estimates" in server.client.get("/").text


def test_a_strange_host_header_is_not_markup(server):
    answer = server.client.get("/", headers={"Host": '"><script>alert(1)</script>'})
    assert "<script>" not in answer.text


@pytest.mark.parametrize(
    ("name", "media_type"),
    [("swagger-ui-bundle.js", "text/javascript"), ("swagger-ui.css", "text/css"),
     ("docs.js", "text/javascript"), ("docs.css", "text/css")],
)  # fmt: skip
def test_the_parts_of_the_documentation_page_are_served_from_here(server, name, media_type):
    answer = server.client.get(f"/docs/{name}")
    assert answer.headers["content-type"].startswith(media_type)
    tag = {"If-None-Match": answer.headers["etag"]}
    assert server.client.get(f"/docs/{name}", headers=tag).status_code == 304


@pytest.mark.parametrize("name", ["start.html", "..%2f..%2fpyproject.toml", "__init__.py"])
def test_nothing_else_is(server, name):
    assert server.client.get(f"/docs/{name}").status_code == 404


def test_a_browser_finds_an_icon_beside_any_document(server):
    answer = server.client.get("/favicon.ico")
    assert answer.status_code == 200
    assert answer.headers["content-type"] == "image/svg+xml"


def test_the_documentation_page_asks_no_validator(server):
    assert "validatorUrl: null" in server.client.get("/docs/docs.js").text
