/* Pixel sizes in XML: the OME model in all its spellings, <Metadata>, items in base64; and XML that attacks. */
#include "io/metadata/xml_scale_priv.h"

#include <stdlib.h>

#include "base/text.h"
#include "check.h"
#include "io/metadata/xml_priv.h"

static picture ome(const char *text) {
    picture p = { 0 };
    ome_read(text, strlen(text), 1024, NULL, &p);
    return p;
}

static void expect(const picture *p, double x, double y) {
    CHECK(p->scales.n == 1 && p->scales.list[0].rank == SCALE_OME);
    CHECK_NEAR(p->scales.list[0].x_nm, x, 1e-9 * x);
    CHECK_NEAR(p->scales.list[0].y_nm, y, 1e-9 * y);
}

#define OME(pixels)                                                                                          \
    "<OME xmlns=\"http://www.openmicroscopy.org/Schemas/OME/2016-06\"><Image ID=\"Image:0\">" pixels         \
    "</Image></OME>"

static void open_model(void) {
    picture p = ome("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n" OME(
        "<AcquisitionDate>2024-06-30T17:06:40</AcquisitionDate><Pixels SizeX='1024' PhysicalSizeX='5.0' "
        "PhysicalSizeXUnit='nm' "
        "PhysicalSizeY='5.5' PhysicalSizeYUnit='nm'><TiffData/></Pixels>"));
    expect(&p, 5.0, 5.5);
    CHECK(!strcmp(p.acquired_at, "2024-06-30T17:06:40") && !p.note[0]);
    static const struct {
        const char *unit;
        double nm;
    } units[] = { { "", 5.0 },
                  { "PhysicalSizeXUnit=\"\xc2\xb5m\"", 5.0 },
                  { "PhysicalSizeXUnit=\"\xce\xbcm\"", 5.0 },
                  { "PhysicalSizeXUnit=\"&#181;m\"", 5.0 },
                  { "PhysicalSizeXUnit=\"&#xb5;m\"", 5.0 },
                  { "PhysicalSizeXUnit=\"\xc3\x82\xc2\xb5m\"", 5.0 },
                  { "PhysicalSizeXUnit=\"\xb5m\"", 5.0 }, /* Latin-1 in a text that claims to be UTF-8 */
                  { "PhysicalSizeXUnit=\"\xc3\x85\"", 0.0005 },
                  { "PhysicalSizeXUnit=\"mm\"", 5000.0 } };
    for (size_t i = 0; i < sizeof units / sizeof units[0]; i++) {
        char text[512];
        snprintf(text, sizeof text, OME("<Pixels PhysicalSizeX=\"0.005\" %s/>"), units[i].unit);
        p = ome(text);
        expect(&p, units[i].nm, units[i].nm);
    }
    CHECK(ome(OME("<Pixels PhysicalSizeX=\"1\" PhysicalSizeXUnit=\"pixel\"/>")).scales.n == 0);
    CHECK(ome(OME("<Pixels PhysicalSizeX=\"1\" PhysicalSizeXUnit=\"reference frame\"/>")).scales.n == 0);
    CHECK(ome(OME("<Pixels PhysicalSizeX=\"0\"/>")).scales.n == 0);
    p = ome("<ome:OME xmlns:ome='x'><ome:Image><ome:Pixels PhysicalSizeX='0.004'/></ome:Image></ome:OME>");
    expect(&p, 4.0, 4.0);
    p = ome("<OME><Image><Pixels PhysicalSizeX='0.004'><TiffData IFD='1'/></Pixels></Image>"
            "<Image><Pixels PhysicalSizeX='0.006'><TiffData IFD='0'/></Pixels></Image></OME>");
    expect(&p, 6.0, 6.0); /* the one whose data are the first page */
    p = ome(OME("<Pixels SizeX='2048' PhysicalSizeX='0.005'/>"));
    expect(&p, 10.0, 10.0);
    CHECK(strstr(p.note, "recorded 2048 pixels wide, now 1024"));
    CHECK(ome("<OME><BinaryOnly MetadataFile='x.ome'/></OME>").companion_wanted);
    CHECK(strstr(ome("<OME><Image><Pixels PhysicalSizeX='0.005'>").note, "damaged"));
    CHECK(ome("<Other><Image><Pixels PhysicalSizeX='0.005'/></Image></Other>").scales.n == 0);
}

static void metadata(void) {
    picture p = { 0 };
    const char *t =
        "<?xml version=\"1.0\"?><Metadata "
        "xmlns=\"x\"><Acquisition><AcquisitionDatetime>2020-08-18T13:40:03</AcquisitionDatetime></"
        "Acquisition>"
        "<Optics><AccelerationVoltage>5000</AccelerationVoltage><WorkingDistance>0.0041</"
        "WorkingDistance><ScanFieldOfView><X>5.12e-6</X><Y>3.84e-6</Y></ScanFieldOfView></Optics>"
        "<StageSettings><StagePosition><Tilt><Alpha>0.3369</Alpha></Tilt></StagePosition></StageSettings>"
        "<ScanSettings><ScanSize><Width>1024</Width><Height>768</Height></ScanSize></ScanSettings>"
        "<Detectors><ScanningDetector><DetectorName>TLD</DetectorName></ScanningDetector></Detectors></"
        "Metadata>";
    tag_34683_read(t, strlen(t), 1024, &p);
    CHECK(p.scales.n == 1 && !strcmp(p.scales.list[0].name, "tag 34683"));
    CHECK_NEAR(p.scales.list[0].x_nm, 5.0, 1e-9);
    CHECK_NEAR(p.facts.tilt_deg, 19.30, 0.01); /* radians in the file */
    CHECK_NEAR(p.facts.working_distance_mm, 4.1, 1e-9);
    CHECK(p.facts.voltage_V >= 5000.0 && !strcmp(p.facts.detector, "TLD") &&
          !strcmp(p.acquired_at, "2020-08-18T13:40:03"));
    p = (picture){ 0 };
    tag_34683_read(" \n", 2, 1024, &p);
    tag_34683_read("<Metadata><Optics>", 18, 1024, &p);
    CHECK(p.scales.n == 0 && !p.note[0]);
}

static void items(void) {
    /* base64 of <?xml version="1.0"?><r><item><key><string>Other</string></key></item><item><key><string>PixelSize</string></key><value><i>
     * <item><Name>Width</Name><u>Meter</u><anyType>2.5E-09</anyType></item>... by a program of the system's */
    static const char xml[] =
        "PD94bWwgdmVyc2lvbj0iMS4wIj8+PHI+PGl0ZW0+PGtleT48c3RyaW5nPk90aGVyPC9zdHJpbmc+PC9rZXk+"
        "PHZhbHVlPjxhbnlUeXBlPjk8L2FueVR5cGU+PC92YWx1ZT48L2l0ZW0+PGl0"
        "ZW0+"
        "PGtleT48c3RyaW5nPlBpeGVsU2l6ZTwvc3RyaW5nPjwva2V5Pjx2YWx1ZT48TmFtZT5XaWR0aDwvTmFtZT48dT5NZXRlcjwvdT48"
        "YW55VHlwZT4yLjVFLTA5PC9hbnlUeXBlPjxO\r\n"
        "YW1lPkhlaWdodDwvTmFtZT48YW55VHlwZT4yLjVFLTA5PC9hbnlUeXBlPjwvdmFsdWU+PC9pdGVtPjwvcj4=";
    picture p = { 0 };
    tag_34680_read(xml, strlen(xml), 1024, &p);
    CHECK(p.scales.n == 1 && !strcmp(p.scales.list[0].name, "tag 34680"));
    CHECK_NEAR(p.scales.list[0].x_nm, 2.5, 1e-9);
    p = (picture){ 0 };
    tag_34680_read("[Vector]\nMagnification=5000\n", 28, 1024,
                   &p); /* the other content of this tag: no scale */
    tag_34680_read("PD94!!", 6, 1024, &p);
    CHECK(p.scales.n == 0);
}

static void nothing(void *state, const xml_path *path, const char *text) {
    (void)path, (void)text;
    ++*(size_t *)state;
}

static void attacks(void) {
    static const xml_visitor visitor = { NULL, nothing };
    size_t n = 0;
    const char *bomb = "<!DOCTYPE x [<!ENTITY a \"aaaaaaaaaa\"><!ENTITY b \"&a;&a;&a;\">]><OME>&b;</OME>";
    CHECK(!xml_walk(bomb, strlen(bomb), &visitor, &n, sizeof n) && n == 0);
    const char *file = "<!DOCTYPE x [<!ENTITY a SYSTEM \"file:///etc/passwd\">]><OME>&a;</OME>";
    CHECK(!xml_walk(file, strlen(file), &visitor, &n, sizeof n) && n == 0);
    textbuf t = { 0 };
    for (int i = 0; i < XML_DEPTH; i++) text_add(&t, "<a>");
    for (int i = 0; i < XML_DEPTH; i++) text_add(&t, "</a>");
    CHECK(xml_walk(t.s, t.n, &visitor, &n, sizeof n) && n == XML_DEPTH);
    text_free(&t);
    for (int i = 0; i < 100000; i++) text_add(&t, "<a>");
    CHECK(!xml_walk(t.s, t.n, &visitor, &n, sizeof n));
    text_free(&t);
    char *big = malloc((16u << 20) + 64);
    if (!big) exit(1);
    memset(big, ' ', (16u << 20) + 64);
    CHECK(!xml_walk(big, (16u << 20) + 64, &visitor, &n, sizeof n));
    free(big);
    CHECK(xml_walk("<a>x</a>\0\0", 10, &visitor, &n, sizeof n) &&
          n == 1); /* blocks are filled up with zeros */
    CHECK(!xml_walk("", 0, &visitor, &n, sizeof n));
}

int main(void) {
    open_model();
    metadata();
    items();
    attacks();
    return check_done();
}
