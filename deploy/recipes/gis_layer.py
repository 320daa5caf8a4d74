"""Gives each feature of a layer its depths: GeoJSON in, GeoJSON out, joined by id. Runs in a desktop GIS's own Python, or as

    python3 gis_layer.py CHANNELS.geojson CHANNELS_WITH_DEPTHS.geojson

Standard library only. LEAT_URL says where the service is. Change `request` to the columns of your own layer.
"""
import json, math, os, sys, urllib.error, urllib.request

URL = os.environ.get("LEAT_URL", "http://127.0.0.1:8080") + "/v1/bulk/depths?prefix=leat_"
KINDS = {"TRAP": "trapezoidal", "RECT": "rectangular", "VEE": "triangular", "PIPE": "circular", "BOX": "box", "EGG": "egg"}
MANNING = {"EARTH": 0.028, "WEEDY": 0.045, "STONE": 0.025, "CONCRETE": 0.013, "BRICK": 0.015, "CLAY": 0.013, "PLASTIC": 0.01, "STEEL": 0.024}
metres = lambda millimetres: None if millimetres is None else millimetres / 1000

def request(p):
    """What Leat is asked about a feature with the properties p. None is left out; what belongs to another kind of section does no harm then."""
    kind, drop = KINDS.get(p["shape"], p["shape"]), p["upstream_level"] - p["downstream_level"]
    return {"leat_section_kind": kind, "leat_section_bottom_width": p["bottom_width"], "leat_section_side_slope": p["side_slope"],
            "leat_section_bank_height": p["bank_height"], "leat_section_diameter": metres(p["height_mm"]) if kind == "circular" else None,
            "leat_section_width": metres(p["width_mm"]), "leat_section_height": metres(p["height_mm"]) if kind in ("box", "egg") else None,
            "leat_barrels": p["barrels"], "leat_roughness_manning": MANNING.get(p["material"]),
            "leat_bed_slope": drop / math.hypot(drop, p["length"]), "leat_discharge": p["flow_design"]}

def depths(layer):
    """Adds the answers to the properties of the layer's features; leat_problem says why a feature has none."""
    asked = [{"type": "Feature", "id": f["id"], "geometry": None, "properties": request(f["properties"])} for f in layer["features"]]
    body = json.dumps({"type": "FeatureCollection", "features": asked}).encode()
    try:
        with urllib.request.urlopen(urllib.request.Request(URL, body, {"Content-Type": "application/geo+json"})) as response:
            answers = {f["id"]: f["properties"] for f in json.load(response)["features"]}
    except urllib.error.HTTPError as error:
        raise SystemExit(json.load(error)["detail"])
    for f in layer["features"]:
        f["properties"].update(answers[f["id"]])
    return layer

if __name__ == "__main__":
    with open(sys.argv[1]) as source, open(sys.argv[2], "w") as target:
        json.dump(depths(json.load(source)), target, indent=1)
