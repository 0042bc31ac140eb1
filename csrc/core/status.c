#include "status.h"

const char *tw_status_name(tw_status status)
{
    switch (status) {
#define STATUS_NAME(symbol, value, name, text) \
    case symbol: return name;
        TW_STATUS_LIST(STATUS_NAME)
#undef STATUS_NAME
    }
    return "unknown";
}

const char *tw_status_text(tw_status status)
{
    switch (status) {
#define STATUS_TEXT(symbol, value, name, text) \
    case symbol: return text;
        TW_STATUS_LIST(STATUS_TEXT)
#undef STATUS_TEXT
    }
    return "unknown status";
}

int tw_status_stops(tw_status status)
{
    return status == TW_CANCELLED || status == TW_DEADLINE;
}
