#include "numbers.hpp"

#include <catch2/catch.hpp>

#include <limits>

using namespace formsieve::cli;

TEST_CASE("cli: counts get thousands separators however long", "[cli][unit]") {
  CHECK(grouped("0") == "0");
  CHECK(grouped("999") == "999");
  CHECK(grouped("1000") == "1,000");
  CHECK(grouped("123456789012345678") == "123,456,789,012,345,678");
  CHECK(grouped("123456789012345678901234567890") == "1.23·10^29");
  CHECK(grouped("-1234") == "-1,234");
  CHECK(grouped("n/a") == "n/a");
  CHECK(grouped("") == "");
  CHECK(grouped(std::size_t{5859375}) == "5,859,375");
}

TEST_CASE("cli: significant digits suit the size of the number", "[cli][unit]") {
  CHECK(significant(0.0) == "0");
  CHECK(significant(-0.0) == "0");
  CHECK(significant(3.14159) == "3.142");
  CHECK(significant(-3.14159) == "−3.142");
  CHECK(significant(120.0) == "120");
  CHECK(significant(0.93) == "0.93");
  CHECK(significant(12343.2) == "12,343");  // whole numbers keep all their digits
  CHECK(significant(9999999.0) == "9,999,999");
  CHECK(significant(9.99996) == "10");
  CHECK(significant(0.0123456) == "0.01235");
  CHECK(significant(0.00012345) == "0.0001234");  // the double lies below the half
  CHECK(significant(123456789.0) == "1.235e8");
  CHECK(significant(-0.0000123456) == "−1.235e−5");
  CHECK(significant(1e300) == "1e300");
  CHECK(significant(std::numeric_limits<double>::infinity()) == "undefined");
  CHECK(significant(std::numeric_limits<double>::quiet_NaN()) == "undefined");
}

TEST_CASE("cli: fixed decimals round, group and keep a true minus sign", "[cli][unit]") {
  CHECK(with_decimals(12343.26, 0) == "12,343");
  CHECK(with_decimals(-0.04, 1) == "0.0");  // no minus before zero
  CHECK(with_decimals(-1234.56, 1) == "−1,234.6");
  CHECK(with_decimals(1e20, 2) == "1e20");  // too long to read
  CHECK(with_decimals(std::numeric_limits<double>::infinity(), 1) == "undefined");
}

TEST_CASE("cli: decimals are what the digits asked for need", "[cli][unit]") {
  CHECK(decimals_for(12343.2, 4) == 0);
  CHECK(decimals_for(123.4, 4) == 1);
  CHECK(decimals_for(0.0423, 4) == 5);
  CHECK(decimals_for(0.0, 4) == 0);
}

TEST_CASE("cli: durations are said in at most two units", "[cli][unit]") {
  CHECK(duration(0.01) == "less than 0.1 s");
  CHECK(duration(0.84) == "0.8 s");
  CHECK(duration(4.0) == "4 s");
  CHECK(duration(9.96) == "10 s");
  CHECK(duration(59.6) == "1 min");
  CHECK(duration(130.0) == "2 min 10 s");
  CHECK(duration(3599.7) == "1 h");
  CHECK(duration(12000.0) == "3 h 20 min");
  CHECK(duration(86399.0) == "1 day");
  CHECK(duration(2 * 86400.0 + 4 * 3600.0) == "2 days 4 h");
  CHECK(duration(-1.0) == "an unknown time");
  CHECK(duration(std::numeric_limits<double>::infinity()) == "an unknown time");
}

TEST_CASE("cli: large counts are rounded to what can be read at a glance", "[cli][unit]") {
  CHECK(rough_count(0) == "0");
  CHECK(rough_count(9999) == "9,999");
  CHECK(rough_count(12345) == "12,000");
  CHECK(rough_count(5859375) == "5.86 million");
  CHECK(rough_count(999700) == "1.00 million");
  CHECK(rough_count(123456789) == "123 million");
  CHECK(rough_count(2.5e11) == "250,000 million");
  CHECK(rough_count(6.02e23) == "6.02e23");
}

TEST_CASE("cli: counted words agree in number", "[cli][unit]") {
  CHECK(counted(1, "row") == "1 row");
  CHECK(counted(0, "row") == "0 rows");
  CHECK(counted(1420, "row") == "1,420 rows");
  CHECK(counted(2, "entry", "entries") == "2 entries");
}

TEST_CASE("cli: small p-values are bounded, not printed as zero", "[cli][unit]") {
  CHECK(p_value(0.0432) == "0.043");
  CHECK(p_value(0.0005) == "0.001");
  CHECK(p_value(1e-30) == "below 0.001");
  CHECK(p_value(0.0) == "below 0.001");
  CHECK(p_value(1.0) == "1.000");
}
