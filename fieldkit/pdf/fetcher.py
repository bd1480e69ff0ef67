"""What the typesetter may load: resources held in memory under `fieldkit:` names, and `data:` images. Nothing else.

The typesetting library's own fetcher embeds local files and follows links; a remark that names a file must not.
"""

from __future__ import annotations

from collections.abc import Mapping

from weasyprint.urls import FatalURLFetchingError, URLFetcher, URLFetcherResponse

SCHEME = "fieldkit:"


class Closed(URLFetcher):
    """Serves `resources` (name -> media type and bytes) and inline images; anything else stops the typesetting."""

    def __init__(self, resources: Mapping[str, tuple[str, bytes]]) -> None:
        super().__init__(allowed_protocols=("data",), allow_redirects=False, fail_on_errors=True)
        self._resources = dict(resources)
        #: every address that was asked for and refused
        self.refused: list[str] = []

    def fetch(self, url: str, headers: Mapping[str, str] | None = None) -> URLFetcherResponse:
        if url.startswith(SCHEME):
            found = self._resources.get(url.removeprefix(SCHEME))
            if found is not None:
                media, data = found
                return URLFetcherResponse(url, data, {"Content-Type": media})
        elif url.startswith("data:image/"):
            return super().fetch(url, dict(headers or {}))
        self.refused.append(url)
        raise FatalURLFetchingError(f"{url[:80]} is not part of the record and was not loaded")
