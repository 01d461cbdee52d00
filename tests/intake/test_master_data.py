"""Files of master data: contract columns, the trade's spellings, every check. All rows are invented."""

from __future__ import annotations

import pytest

from registry.intake import KINDS, ReadingOptions, read_file
from registry.intake.fields import iso_date, truth, word
from registry.intake.kinds import FIELDS, NEEDS

CONTRACT = {  # design contract: columns of the import files
    "areas": "area epsg heat_flow_mw_m2 surface_temperature_c conductivity_w_m_k heat_production_uw_m3"
    " heat_production_depth_m",
    "sites": "site_code site_kind area easting northing elevation_m epsg depth_m azimuth_reference longitude latitude",
    "surveys": "site_code depth_m azimuth_deg dip_deg",
    "intervals": "site_code from_m to_m lithology description",
    "intrusions": "intrusion area shape half_width_m volume_km3 depth_to_top_m emplacement_depth_m age_ma age_sigma_ma"
    " country_density_kg_m3",
    "samples": "sample_code sample_kind site_code from_m to_m intrusion lithology texture alteration igsn collected_on"
    " duplicate_of reference_material magnetic_susceptibility_si density_kg_m3 pulp_available",
    "reference-materials": "reference_material analyte value unit uncertainty status source",
}
ROWS = {
    "areas": "Blue ridge,32633,65,8,2.5,2.1,10000",
    "sites": "BR-01,drill_hole,Blue ridge,512000,5200000,310,32633,250,true,,",
    "surveys": "BR-01,0,90,-60",
    "intervals": "BR-01,0,12.5,granite,coarse",
    "intrusions": "Blue stock,Blue ridge,sphere,800,,500,2000,280,2,2700",
    "samples": "S1,core,BR-01,1,2,Blue stock,granite,porphyritic,fresh,,2024-05-31,,,0.004,2650,yes",
    "reference-materials": "RM-1,SiO2,60.5,wt%,0.4,published,invented",
}


def read(text, kind=None, **options):
    return read_file("master.csv", text.encode(), kind, ReadingOptions(**options))


def problems(reading):
    return [problem for problem in reading.problems if problem.severity == "problem"]


def only(reading, words):
    (problem,) = problems(reading)
    assert words in problem.what, problem.sentence()
    assert problem.remedy
    return problem


@pytest.mark.parametrize("kind", sorted(CONTRACT))
def test_contract_columns_of_every_kind_are_read_and_the_kind_is_told(kind):
    columns = CONTRACT[kind].split()
    reading = read(",".join(columns) + "\n" + ROWS[kind] + "\n")
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    assert reading.kind == reading.master.kind == kind
    assert set(reading.master.columns) == set(columns)
    assert len(reading.master) == 1
    assert reading.master.line_no.tolist() == [2]
    for column, text in zip(columns, ROWS[kind].split(","), strict=True):
        (value,) = reading.master.rows[column]
        assert (value is None) == (text == "")
        assert isinstance(value, (float, int, str, bool, type(None)))


def test_every_kind_has_its_fields_and_its_needs_said():
    assert set(NEEDS) == set(KINDS)
    assert set(FIELDS) == set(KINDS) - {"results"}


def test_typed_values_are_numbers_dates_words_and_truth():
    text = "Sample_ID,Sample Type,Hole ID,From (m),To (m),Date,Pulp,Mag Sus (10-3 SI),SG (g/cm3)\n"
    reading = read(text + "S1,Core,BR-01,1.5,2.5,31 May 2024,Y,4.1,2.65\n")
    rows = reading.master.rows
    assert rows["sample_kind"] == ["core"]
    assert rows["from_m"] == [1.5]
    assert rows["collected_on"] == ["2024-05-31"]
    assert rows["pulp_available"] == [True]
    assert rows["magnetic_susceptibility_si"] == [pytest.approx(0.0041)]
    assert rows["density_kg_m3"] == [pytest.approx(2650)]


@pytest.mark.parametrize(
    ("kind", "headings", "row"),
    [
        ("sites", "HoleID,Type,East,North,RL,EPSG,EOH", "BR-01,DDH,512000,5200000,310,32633,250"),
        ("sites", "Station,Longitude,Latitude,Site Kind", "ST-1,15.1,46.9,outcrop"),
        ("surveys", "BHID,Depth (m),Azimuth,Dip", "BR-01,0,90,-60"),
        ("intervals", "Hole_ID,FROM,TO,LITH,Comments", "BR-01,0,10,granite,x"),
        ("samples", "Sample No,Hole ID,From,To,Rock type", "S1,BR-01,1,2,granite"),
        ("intrusions", "Intrusion name,Shape,Radius (m),Age (Ma)", "Blue,cylinder,300,280"),
        ("areas", "Prospect,CRS,Heat flow", "Blue ridge,32633,65"),
        ("results", "Sample No,SiO2 (%),Hole ID,From,To", "S1,60,BR-01,1,2"),
    ],
)
def test_usual_spellings_tell_the_kind(kind, headings, row):
    reading = read(f"{headings}\n{row}\n")
    assert reading.kind == kind
    assert reading.ok, [problem.sentence() for problem in reading.problems]


def test_unknown_headings_name_what_each_kind_needs():
    problem = only(read("colour,flavour\nred,sweet\n"), "the kind of file cannot be told")
    assert all(kind in problem.expected for kind in KINDS)


def test_unknown_kind_is_a_wrong_call():
    with pytest.raises(ValueError, match="unknown kind of file 'rocks'"):
        read_file("a.csv", b"a,b\n1,2\n", "rocks")


def test_missing_required_column_is_named():
    problem = only(read("site_code,depth_m,dip_deg\nBR-01,0,-60\n", "surveys"), "a column that surveys need is missing")
    assert problem.column == "azimuth_deg"


def test_blank_cells_are_none_so_that_they_never_erase():
    rows = read("sample_code,site_code,lithology,density_kg_m3\nS1,,,-\n").master.rows
    assert rows == {"sample_code": ["S1"], "site_code": [None], "lithology": [None], "density_kg_m3": [None]}


@pytest.mark.parametrize(
    ("text", "kind", "what", "row", "column"),
    [
        ("site_code,longitude,latitude\nA,15,91\n", "sites", "latitude is out of range", 2, "latitude"),
        ("site_code,longitude,latitude\nA,181,10\n", "sites", "longitude is out of range", 2, "longitude"),
        ("site_code,easting,northing\nA,5000,\n", "sites", "only one of a pair of coordinates", 2, "northing"),
        ("site_code,site_kind,easting,northing\nA,trench,1000,2000\n",
         "sites", "site_kind is not a known word", 2, "site_kind"),
        ("site_code,easting,northing,epsg\nA,1000,2000,32633.5\n", "sites", "epsg is not a whole number", 2, "epsg"),
        ("site_code,easting,northing,azimuth_reference\nA,1000,2000,sun\n", "sites", "azimuth_reference is not", 2,
         "azimuth_reference"),
        ("site_code,depth_m,azimuth_deg,dip_deg\nA,0,361,-60\n",
         "surveys", "azimuth_deg is out of range", 2, "azimuth_deg"),
        ("site_code,depth_m,azimuth_deg,dip_deg\nA,0,10,-95\n", "surveys", "dip_deg is out of range", 2, "dip_deg"),
        ("site_code,depth_m,azimuth_deg,dip_deg\nA,0,10,-60\nA,0,11,-61\n",
         "surveys", "site_code and depth_m stand together more than once", 3, "site_code"),
        ("site_code,from_m,to_m,lithology\nA,5,5,granite\n", "intervals", "runs backwards or is empty", 2, "from_m"),
        ("site_code,from_m,to_m,lithology\nA,x,5,granite\n", "intervals", "from_m is not a number", 2, "from_m"),
        ("site_code,from_m,to_m,lithology\nA,1,5,\n", "intervals", "lithology is blank", 2, "lithology"),
        ("intrusion,shape,volume_km3\nA,slab,5\n", "intrusions", "a volume alone does not fix", 2, "volume_km3"),
        ("intrusion,shape,volume_km3\nA,cylinder,5\n", "intrusions", "a volume alone does not fix", 2, "volume_km3"),
        ("intrusion,shape,age_ma\nA,cube,5\n", "intrusions", "shape is not a known word", 2, "shape"),
        ("intrusion,shape,half_width_m\nA,slab,0\n", "intrusions", "half_width_m is zero", 2, "half_width_m"),
        ("sample_code,collected_on,site_code\nS1,03/04/2021,A\n",
         "samples", "collected_on is not a date", 2, "collected_on"),
        ("sample_code,sample_kind,site_code\nS1,liver,A\n",
         "samples", "sample_kind is not a known word", 2, "sample_kind"),
        ("sample_code,site_code\nS1,A\nS1,B\n", "samples", "sample_code stands more than once", 3, "sample_code"),
        ("sample_code,site_code\n,A\n", "samples", "sample_code is blank", 2, "sample_code"),
        ("sample_code,site_code,density (apples)\nS1,A,5\n", "samples", "the unit in the heading does not belong", None,
         "density (apples)"),
        ("reference_material,analyte,value,unit\nR,Xq,5,ppm\n",
         "reference-materials", "the analyte is not known", 2, "analyte"),
        ("reference_material,analyte,value,unit\nR,Zr,5,lb\n",
         "reference-materials", "the unit is not known", 2, "unit"),
    ],
)  # fmt: skip
def test_fault_of_master_data_is_told_with_its_place(text, kind, what, row, column):
    reading = read(text, kind)
    problem = only(reading, what)
    assert (problem.row, problem.column) == (row, column)
    assert reading.refused_lines == ({row} if row else set())


def test_all_faults_of_a_file_come_at_once():
    text = "site_code,depth_m,azimuth_deg,dip_deg\nA,x,400,-60\n,5,10,-100\n"
    assert len(problems(read(text, "surveys"))) == 5 - 1


def test_positive_dips_only_are_questioned_and_settled_by_the_user():
    text = "site_code,depth_m,azimuth_deg,dip_deg\nA,0,90,60\nA,50,91,61\nB,0,0,0\n"
    problem = only(read(text), "every dip of the file is positive")
    assert problem.found == "60 to 61"
    assert read(text, positive_dips="down").master.rows["dip_deg"] == [-60, -61, 0]
    assert read(text, positive_dips="up").master.rows["dip_deg"] == [60, 61, 0]
    assert read(text + "B,20,0,-5\n").ok


def test_sphere_with_a_volume_only_is_taken():
    assert read("intrusion,shape,volume_km3\nA,sphere,5\n").ok


def test_overlapping_intervals_of_one_hole_are_a_warning():
    text = "site_code,from_m,to_m,lithology\nA,0,10,granite\nB,5,8,dyke\nA,9,12,skarn\n"
    reading = read(text)
    assert reading.ok
    (warning,) = reading.warnings
    assert (warning.row, warning.found) == (4, "9 to 12")


def test_decimal_comma_and_feet_are_converted():
    reading = read("site_code;from (ft);to (ft);lithology\nA;0;32,8084;granite\n")
    assert reading.kind == "intervals"
    assert reading.master.rows["to_m"] == [pytest.approx(10.0)]
    assert any("multiplied by 0.3048" in sentence for sentence in reading.understood)


def test_unknown_column_is_ignored_with_a_warning():
    reading = read("sample_code,site_code,colour\nS1,A,grey\n")
    assert reading.master.ignored == ("colour",)
    assert [warning.column for warning in reading.warnings] == ["colour"]


@pytest.mark.parametrize(
    ("text", "iso"),
    [
        ("2024-05-31", "2024-05-31"),
        ("2024/5/31", "2024-05-31"),
        ("20240531", "2024-05-31"),
        ("2024-05-31 00:00:00", "2024-05-31"),
        ("31.05.2024", "2024-05-31"),
        ("05/31/2024", "2024-05-31"),
        ("5/5/2024", "2024-05-05"),
        ("31-May-2024", "2024-05-31"),
        ("May 31, 2024", "2024-05-31"),
        ("03/04/2021", None),
        ("31/05/24", None),
        ("2024-02-30", None),
        ("spring", None),
    ],
)
def test_date_is_taken_only_if_it_reads_one_way(text, iso):
    assert iso_date(text) == iso


def test_words_and_truth_values_take_the_trades_synonyms():
    assert word("DDH", ("drill_hole", "outcrop")) == "drill_hole"
    assert word("Field duplicate", ("blank", "duplicate")) == "duplicate"
    assert word("sill", ("sphere", "slab", "cylinder")) == "slab"
    assert word("grab", ("core", "chips")) is None
    assert (truth("Yes"), truth("0"), truth("maybe")) == (True, False, None)


def test_code_that_nobody_can_have_meant_is_refused_in_master_data():
    reading = read(f"sample_code,sample_kind\n{'A' * 101},core\n{'B' * 100},core\n", "samples")
    (problem,) = problems(reading)
    assert problem.row == 2 and problem.what == "the code has 101 characters"


@pytest.mark.parametrize("heading", ["SG", "Specific gravity", "Density (g/cm3)", "density (t/m3)"])
def test_specific_gravity_is_a_density_in_grams(heading):
    reading = read(f"sample_code,lithology,{heading}\nS1,granite,2.65\n")
    assert reading.ok, reading.problems
    assert reading.master.rows["density_kg_m3"] == [2650.0]


def test_density_without_its_unit_says_what_to_do():
    (problem,) = [p for p in read("sample_code,lithology,density\nS1,granite,2.65\n").problems if p.row]
    assert "density (g/cm3)" in problem.remedy


@pytest.mark.parametrize("cell", ["32633", "EPSG:32633", "epsg 32633", "EPSG::32633"])
def test_coordinate_system_may_be_written_with_its_register(cell):
    reading = read(f"site_code,easting,northing,epsg\nA,500000,6000000,{cell}\n")
    assert reading.ok, reading.problems
    assert reading.master.rows["epsg"] == [32633]


def test_second_column_of_one_meaning_is_told_and_not_called_unknown():
    reading = read("sample_code,from,sampfrom,to,site_code\nS1,1,7,3,DD1\n")
    (warning,) = reading.warnings
    assert "another column is from_m as well; this one is ignored" in warning.what
    assert (warning.column, warning.found) == ("sampfrom", "'from' before it")


def test_degrees_minutes_and_seconds_are_told_how_to_be_written():
    reading = read("site_code,latitude,longitude\nA,45\u00b030'00,12.5\n")
    assert "as one decimal number" in reading.problems[0].remedy


@pytest.mark.parametrize(
    ("said", "kind"), [("Core sample", "core"), ("Rock sample", "outcrop"), ("grab sample", "outcrop")]
)
def test_kind_of_a_sample_may_end_with_the_word_sample(said, kind):
    assert read(f"sample_code,sample_kind\nS1,{said}\n").master.rows["sample_kind"] == [kind]
