"""The web: the app (app), one module a page group, the tablet's calls (sync, enrol) and its shell (tablet).

Views parse, call an operation, answer. Every view says who may have it (fieldkit.web.security); one that does not is
refused to everybody, and a sweep test names it. To add a page: a view in its group, one template.
"""
