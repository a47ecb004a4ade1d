/* The columns come from the tables that print the rows, so that schema and rows cannot drift apart; the parts of results.json that
 * are no table are written down here. A measured value may always be null: not measured. */
#include "report/schema.h"

#include <string.h>

#include "io/json.h"
#include "report/package.h"

static const char *type_of(column_kind kind) {
    return kind == COL_NUMBER ? "[\"number\", \"null\"]" : kind == COL_COUNT ? "[\"integer\", \"null\"]" : "[\"string\", \"null\"]";
}

static void add_property(textbuf *out, int first, const char *name, const char *type, const char *unit, const char *meaning) {
    text_add(out, first ? "\n          " : ",\n          ");
    json_string(out, name);
    text_addf(out, ": {\"type\": %s", type);
    package_describe(unit, meaning, out);
}

/* "name": {an object with these columns}. `more` further properties, as text that begins with a comma. */
static void add_row(textbuf *out, const char *name, const column *columns, size_t n, const char *const *extra, size_t n_extra, const char *more) {
    text_addf(out, ",\n    \"%s\": {\"type\": \"object\",\n        \"properties\": {", name);
    for (size_t i = 0; i < n; i++) add_property(out, i == 0, columns[i].name, type_of(columns[i].kind), columns[i].unit, columns[i].help);
    for (size_t i = 0; i < n_extra; i++)
        add_property(out, 0, extra[i], "[\"string\", \"null\"]", "",
                     !strncmp(extra[i], "verdict_", 8) ? "verdict on this quantity alone" : "carried along from the sample sheet");
    text_addf(out, "%s},\n        \"required\": [", more);
    for (size_t i = 0; i < n; i++) {
        if (i) text_add(out, ", ");
        json_string(out, columns[i].name);
    }
    text_add(out, "]}");
}

static const char image_more[] =
    ",\n          \"pixels\": {\"type\": [\"object\", \"null\"], \"description\": \"figures in px, so that they can be had without a pixel size\"},"
    "\n          \"budget\": {\"$ref\": \"#/$defs/budget\"},"
    "\n          \"overlay\": {\"type\": [\"string\", \"null\"], \"description\": \"path of the overlay, relative to this file\"}";

static const char sample_more[] =
    ",\n          \"prediction\": {\"type\": [\"object\", \"null\"], \"description\": \"parts of the uncertainty of the weighted reflectance, and what the model says of itself\"},"
    "\n          \"budget\": {\"$ref\": \"#/$defs/budget\"}";

/* What is no table. */
static const char parts[] =
    "\"numbers\": {\"type\": \"array\", \"items\": {\"type\": [\"number\", \"null\"]}},\n"
    "    \"budget\": {\"type\": [\"object\", \"null\"], \"description\": \"standard uncertainties of each quantity and their parts, in its unit\",\n"
    "        \"additionalProperties\": {\"type\": \"object\", \"additionalProperties\": {\"type\": [\"number\", \"null\"]}}},\n"
    "    \"spectrum\": {\"type\": \"object\", \"properties\": {\"sample\": {\"type\": \"string\"}, \"angle_deg\": {\"type\": [\"number\", \"null\"]},\n"
    "        \"polarization\": {\"enum\": [\"mean\", \"s\", \"p\", \"diffuse\"]}, \"wavelength_nm\": {\"type\": \"array\", \"items\": {\"type\": \"number\"}},\n"
    "        \"reflectance\": {\"$ref\": \"#/$defs/numbers\"}, \"reflectance_lo\": {\"$ref\": \"#/$defs/numbers\"}, \"reflectance_hi\": {\"$ref\": \"#/$defs/numbers\"}},\n"
    "        \"required\": [\"sample\", \"angle_deg\", \"polarization\", \"wavelength_nm\", \"reflectance\", \"reflectance_lo\", \"reflectance_hi\"]},\n"
    "    \"wafer\": {\"type\": \"object\", \"description\": \"evenness of one quantity over one wafer\", \"properties\": {\"lot\": {\"type\": [\"string\", \"null\"]},\n"
    "        \"wafer\": {\"type\": [\"string\", \"null\"]}, \"quantity\": {\"type\": \"string\"}, \"n\": {\"type\": \"integer\", \"minimum\": 3}, \"mean\": {\"type\": \"number\"},\n"
    "        \"sd\": {\"type\": [\"number\", \"null\"]}, \"sd_rel\": {\"type\": [\"number\", \"null\"]}, \"range\": {\"type\": [\"number\", \"null\"]},\n"
    "        \"edge_minus_centre\": {\"type\": [\"number\", \"null\"]}, \"edge_minus_centre_rel\": {\"type\": [\"number\", \"null\"]}},\n"
    "        \"required\": [\"wafer\", \"quantity\", \"n\", \"mean\"]},\n"
    "    \"series\": {\"type\": \"object\", \"description\": \"control chart of one quantity over the history\", \"properties\": {\"quantity\": {\"type\": \"string\"},\n"
    "        \"unit\": {\"type\": \"string\"}, \"target_min\": {\"type\": [\"number\", \"null\"]}, \"target_max\": {\"type\": [\"number\", \"null\"]},\n"
    "        \"phases\": {\"type\": \"array\", \"items\": {\"type\": \"object\"}}, \"points\": {\"type\": \"array\", \"items\": {\"type\": \"object\",\n"
    "            \"properties\": {\"number\": {\"type\": \"integer\"}, \"etched_at\": {\"type\": \"string\"}, \"value\": {\"type\": [\"number\", \"null\"]},\n"
    "                \"alarms\": {\"type\": \"array\", \"items\": {\"type\": \"string\"}}, \"excluded\": {\"type\": [\"string\", \"null\"]}},\n"
    "            \"required\": [\"number\", \"etched_at\", \"value\", \"alarms\", \"excluded\"]}},\n"
    "        \"notes\": {\"type\": \"array\", \"items\": {\"type\": \"object\"}}, \"findings\": {\"type\": \"array\", \"items\": {\"type\": \"object\"}},\n"
    "        \"sentences\": {\"type\": \"array\", \"items\": {\"type\": \"string\"}}},\n"
    "        \"required\": [\"quantity\", \"unit\", \"target_min\", \"target_max\", \"phases\", \"points\", \"notes\", \"findings\", \"sentences\"]},\n"
    "    \"window\": {\"description\": \"process window around the samples; null or missing: why there is none\", \"type\": [\"object\", \"null\"],\n"
    "        \"properties\": {\"missing\": {\"type\": \"string\"}, \"target\": {\"type\": \"number\"}, \"contour\": {\"type\": \"array\", \"items\": {\"type\": \"object\"}},\n"
    "            \"cells\": {\"type\": \"array\", \"items\": {\"type\": \"object\"}}, \"samples\": {\"type\": \"array\", \"items\": {\"type\": \"object\"}}}},\n"
    "    \"angles\": {\"description\": \"weighted reflectance of some samples against the angle; null or missing: why there is none\", \"type\": [\"object\", \"null\"],\n"
    "        \"properties\": {\"missing\": {\"type\": \"string\"}, \"samples\": {\"type\": \"array\", \"items\": {\"type\": \"object\",\n"
    "            \"properties\": {\"sample\": {\"type\": \"string\"}, \"sweep\": {\"type\": \"object\"}}, \"required\": [\"sample\", \"sweep\"]}}}},\n"
    "    \"flag\": {\"type\": \"object\", \"properties\": {\"flag\": {\"type\": \"string\"}, \"meaning\": {\"type\": \"string\"}}, \"required\": [\"flag\", \"meaning\"]},\n"
    "    \"manifest\": {\"type\": \"object\", \"description\": \"program, protocol and the SHA-256 of every input\", \"properties\": {\"program\": {\"type\": \"string\"},\n"
    "        \"version\": {\"type\": \"string\"}, \"inputs\": {\"type\": \"array\", \"items\": {\"type\": \"object\", \"properties\": {\"file\": {\"type\": \"string\"},\n"
    "            \"sha256\": {\"type\": [\"string\", \"null\"], \"pattern\": \"^[0-9a-f]{64}$\"}}, \"required\": [\"file\", \"sha256\"]}}},\n"
    "        \"required\": [\"program\", \"version\", \"inputs\"]}";

void schema_json(const results *r, textbuf *out) {
    static const char *const member[][2] = { { "wafers", "wafer" }, { "series", "series" }, { "images", "image" }, { "samples", "sample" },
                                             { "places", "place" }, { "spectra", "spectrum" }, { "flags", "flag" } };
    text_add(out, "{\n  \"$schema\": \"https://json-schema.org/draft/2020-12/schema\",\n  \"title\": \"results.json of sward\",\n  \"type\": \"object\",\n"
                  "  \"properties\": {\n    \"manifest\": {\"$ref\": \"#/$defs/manifest\"},\n    \"summary\": {\"type\": \"string\"},\n"
                  "    \"window\": {\"$ref\": \"#/$defs/window\"},\n    \"angles\": {\"$ref\": \"#/$defs/angles\"}");
    for (size_t i = 0; i < sizeof member / sizeof member[0]; i++)
        text_addf(out, ",\n    \"%s\": {\"type\": \"array\", \"items\": {\"$ref\": \"#/$defs/%s\"}}", member[i][0], member[i][1]);
    text_add(out, "\n  },\n  \"required\": [\"manifest\", \"summary\", \"wafers\", \"series\", \"window\", \"angles\", \"images\", \"samples\", \"places\", \"spectra\", \"flags\"],\n"
                  "  \"$defs\": {\n    ");
    text_add(out, parts);
    text_add(out, ",\n    \"place\": {\"description\": \"where on its wafer a sample was taken, from the middle\", \"type\": \"object\",\n"
                  "        \"properties\": {\"sample\": {\"type\": \"string\"}, \"x_mm\": {\"type\": \"number\"}, \"y_mm\": {\"type\": \"number\"}},\n"
                  "        \"required\": [\"sample\", \"x_mm\", \"y_mm\"]}");
    add_row(out, "image", image_columns, n_image_columns, NULL, 0, image_more);
    add_row(out, "sample", sample_columns, n_sample_columns, r->sample_extra, r->n_sample_extra, sample_more);
    text_add(out, "\n  }\n}\n");
}
