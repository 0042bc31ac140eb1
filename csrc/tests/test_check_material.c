/* Curved laws, creep and history out of range are refused, each at its own field. */
#include "check.h"

#include <string.h>

#include "cases.h"
#include "expect.h"

static void make(tw_case *c)
{
    const tw_part part = {.loading_N = {0.0, 20e6, -1e9}, .creep_N = {0.0, 14e6}, .valid_to = 0.005,
                          .final_stiffness_N = 21e6, .expansion_per_K = 18e-6};
    case_route(c);
    c->project.line.parts[0] = c->project.line.parts[1] = part;
    c->project.line.part_count = 2;
    c->project.history.creep_condition = TW_NONE;
}

static void expect(const tw_case *c, const char *table, size_t index, const char *field, int line)
{
    tw_fault fault;
    tw_status status = tw_check_project(&c->project, &fault);
    check_one(status == TW_ERROR_RANGE && !strcmp(fault.table, table) && fault.index == index && !strcmp(fault.field, field)
                  && strlen(fault.expected) > 5,
              __FILE__, line, field);
}

#define REFUSED(change, table, index, field)        \
    do {                                            \
        tw_case c;                                  \
        make(&c);                                   \
        tw_part *part = &c.project.line.parts[1];   \
        tw_line *line = &c.project.line;            \
        (void)part;                                 \
        (void)line;                                 \
        change;                                     \
        expect(&c, table, index, field, __LINE__);  \
    } while (0)

int main(void)
{
    tw_case good;
    tw_fault fault;
    make(&good);
    CHECK(tw_check_project(&good.project, &fault) == TW_OK);
    good.project.line.parts[0].creep_N[0] = (double)NAN; /* does not creep */
    CHECK(tw_check_project(&good.project, &fault) == TW_OK);
    REFUSED(part->loading_N[3] = (double)INFINITY, "parts", 1, "loading_N");
    REFUSED(part->loading_N[0] = (double)NAN, "parts", 1, "loading_N");
    REFUSED(part->loading_N[2] = -2.1e9, "parts", 1, "loading_N"); /* falls at its end */
    REFUSED((part->loading_N[2] = -9e9, part->loading_N[3] = 1.3e12), "parts", 1, "loading_N"); /* in its middle */
    REFUSED(part->loading_N[1] = -1.0, "parts", 1, "loading_N");
    REFUSED(part->loading_N[0] = -1e6, "parts", 1, "loading_N"); /* carries nothing at its end */
    REFUSED(part->valid_to = 0.0, "parts", 1, "valid_to");
    REFUSED(part->valid_to = 0.3, "parts", 1, "valid_to");
    REFUSED(part->creep_N[1] = (double)INFINITY, "parts", 1, "creep_N");
    REFUSED(part->creep_N[1] = -5.0, "parts", 1, "creep_N");
    REFUSED(part->creep_N[1] = 19e6, "parts", 1, "creep_N"); /* above the loading curve at its end */
    REFUSED(part->final_stiffness_N = 0.0, "parts", 1, "final_stiffness_N");
    REFUSED(part->expansion_per_K = 2e-3, "parts", 1, "expansion_per_K");
    REFUSED((part->expansion_per_K = 9e-4, c.project.stringing.temperature_degC = 1000.0), "conditions", 0,
            "temperature_degC");
    REFUSED(line->part_count = 3, "line", TW_NONE, "parts");
    REFUSED(line->test_temperature_degC = (double)NAN, "line", TW_NONE, "test_temperature_degC");
    REFUSED(line->bedding_in_strain = -1e-4, "line", TW_NONE, "bedding_in_strain");
    REFUSED(line->creep_coefficient = -1e-6, "line", TW_NONE, "creep_coefficient");
    REFUSED(line->creep_exponent = 1.5, "line", TW_NONE, "creep_exponent");
    REFUSED(line->creep_hours = -1.0, "line", TW_NONE, "creep_hours");
    REFUSED((line->creep_coefficient = 1e-2, line->creep_exponent = 1.0, line->creep_hours = 1e5), "line", TW_NONE,
            "creep_hours");
    REFUSED(c.project.history.creep_condition = 99, "history", TW_NONE, "creep_condition");
    return check_end("test_check_material");
}
