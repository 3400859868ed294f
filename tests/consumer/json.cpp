// A user of whet::json.
#if __has_include(<whet/report/json.hpp>)
#include <whet/report/json.hpp>
#else
#include <nlohmann/json.hpp>
#endif

int main() { return nlohmann::json({{"rate", 0.5}}).size() == 1 ? 0 : 1; }
