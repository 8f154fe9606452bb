"""The report as one HTML file with everything inside.

`render.page_html` writes it from a `subject.Subject`; `sections` lists the sections, which are functions in
modules beside it; what a section is made of stands in `parts`.
"""
