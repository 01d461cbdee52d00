from flask import Blueprint
blueprint = Blueprint("editing", __name__)
@blueprint.get("/edit/<kind>/<path:code>")
def page(kind: str, code: str) -> str:
    return ""
