#include <string>
#include <utility>

#include "recording/timestamp.hpp"
#include "support/catch.hpp"

using namespace stillmass::recording;

// Seconds since 1970 by Python's datetime (timestamp() in UTC).
TEST_CASE("time stamps as instruments and spreadsheets write them are read to the last digit") {
  constexpr double leap_day_noon = 1709208000.0;  // 2024-02-29 12:00:00 UTC
  for (const char* text :
       {"2024-02-29T12:00:00Z", "2024-02-29 12:00:00", "2024-02-29T13:30:00+01:30", "2024-02-29T07:00:00-0500",
        "2024-02-29T14:00:00+02", "2024/02/29 12:00", "2024.02.29 12:00:00.000", "29.02.2024 12:00:00,000",
        "29.2.2024 12:00:00", "29.02.24 12:00:00", "29/02/2024 12:00:00 PM", "02/29/2024 12:00:00 PM",
        "29-02-2024_12:00:00", "29-Feb-2024 12:00:00 UTC", "29 feb 2024 12:00:00", "2/29/2024, 12:00:00 PM",
        "  2024-02-29   12:00:00  "}) {
    INFO(text);
    const auto read = parse_timestamp(text);
    REQUIRE(read.has_value());
    CHECK(*read == leap_day_noon);
  }
  CHECK(*parse_timestamp("1999-12-31T23:59:59.5Z") == 946684799.5);
  CHECK(*parse_timestamp("31.12.99 23:59:59.5") == 946684799.5);
}

TEST_CASE("clock times count from midnight") {
  CHECK(*parse_timestamp("00:00:00") == 0.0);
  CHECK(*parse_timestamp("01:02:03.25") == 3723.25);
  CHECK(*parse_timestamp("1:02:03,25") == 3723.25);
  CHECK(*parse_timestamp("01:02:03:250") == 3723.25);
  CHECK(*parse_timestamp("12:00:00 AM") == 0.0);
  CHECK(*parse_timestamp("12:00:01 PM") == 43201.0);
  CHECK(*parse_timestamp("1:00:00PM") == 46800.0);
  CHECK(*parse_timestamp("02:03.25") == 123.25);
  CHECK(*parse_timestamp("13:18:28.0714167499997703601") == Approx(47908.07141675).epsilon(1e-15));
}

TEST_CASE("what is no time stamp is not taken for one") {
  for (const char* text : {"",
                           "12",
                           "12:30",
                           "12:30:",
                           "12:61:00",
                           "25:00:00",
                           "12:00:00 XM",
                           "13:00:00 PM",
                           "2024-02-30 12:00:00",
                           "2024-13-01 12:00:00",
                           "2024-02-28",
                           "28.02.2024",
                           "2024-02-28 12:00:00 CET",
                           "2024-02-28T12:00:00+25:00",
                           "1.2.3",
                           "-5:00:00",
                           "10:00:00:",
                           "28-Fob-2024 12:00:00",
                           "12:00:00.5x",
                           "192.168.10.1"}) {
    INFO(text);
    CHECK_FALSE(parse_timestamp(text).has_value());
  }
}

TEST_CASE("the order of day and month is told by a number above 12") {
  CHECK(order_evidence("03/04/2024 10:00:00") == OrderEvidence::either);
  CHECK(order_evidence("13/04/2024 10:00:00") == OrderEvidence::day_first);
  CHECK(order_evidence("04/13/2024 10:00:00") == OrderEvidence::month_first);
  CHECK(order_evidence("04-05-2024 10:00:00") == OrderEvidence::either);
  for (const char* settled : {"05/05/2024 10:00:00", "2024-04-03 10:00:00", "03.04.2024 10:00:00", "10:00:00"}) {
    CHECK(order_evidence(settled) == OrderEvidence::none);
  }
  const double day_first = *parse_timestamp("03/04/2024 00:00:00", DateOrder::day_first);
  CHECK(*parse_timestamp("03/04/2024 00:00:00", DateOrder::month_first) == day_first - 30.0 * 86400.0);  // March 4th
}

TEST_CASE("a recording that begins in the evening goes on after midnight") {
  StampReading reading;
  reading.begin_at(*reading.seconds("23:59:59"));
  CHECK(*reading.seconds("23:59:59.5") == 86399.5);
  CHECK(*reading.seconds("00:00:01") == 86401.0);
  CHECK(*reading.seconds("21:00:00") == 162000.0);
  CHECK(*reading.seconds("23:00:00") == 82800.0);  // a clock set back by up to two hours is no new day
}

TEST_CASE("the last printed digit of a stamp is found behind its seconds") {
  for (const auto& [text, digits] : {std::pair{"10:00:00", 0},
                                     {"10:00:00.125", 3},
                                     {"10:00:00,5", 1},
                                     {"10:00:00:250", 3},
                                     {"15:00.25", 2},
                                     {"28.02.2024 10:00:00", 0},
                                     {"28.02.2024 10:00:00.12", 2},
                                     {"2024-02-28T10:00:00.123456Z", 6},
                                     {"2024-02-28T10:00:00+01:00", 0},
                                     {"28-Dec-2024 10:00:00.5 PM", 1}}) {
    INFO(text);
    CHECK(fraction_digits(text) == digits);
  }
}
