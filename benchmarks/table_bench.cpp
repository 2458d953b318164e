// Speed of reading a delimited text of about 200 MB, beside a plain reader (one strtod for each cell) and, where Python
// with NumPy is installed, numpy.loadtxt, on the same file in the same run.
//
//   table_bench [MEGABYTES [FOLDER]]
//
// writes the invented table formsieve-table-bench-MEGABYTES.csv into FOLDER (default: the folder for temporary files)
// unless it is there already, and leaves it there.
#include "base/parallel.hpp"

#include <formsieve/table.hpp>

#include <algorithm>
#include <array>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <iostream>
#include <limits>
#include <random>
#include <string>
#include <string_view>
#include <vector>

#include <sys/resource.h>

namespace {

using formsieve::table::Column;
using formsieve::table::ColumnType;
using formsieve::table::CsvOptions;
using formsieve::table::Table;

constexpr int kRepeats = 3;  // the best counts: the machine can only make a reader slower
constexpr std::size_t kNumericColumns = 9;

/// Time on the clock, and that of all processors; on a busy machine only the second tells of the reader.
struct Times {
  double seconds = std::numeric_limits<double>::infinity();
  double cpu_seconds = std::numeric_limits<double>::infinity();
};

struct Outcome {
  Times times;
  std::size_t n_rows = 0;
  std::array<double, kNumericColumns> sums = {};
};

/// Times since it was made.
class Stopwatch {
 public:
  Times read() const { return {clock_now() - clock_start_, cpu_now() - cpu_start_}; }

 private:
  static double clock_now() {
    return std::chrono::duration<double>(std::chrono::steady_clock::now().time_since_epoch()).count();
  }
  static double cpu_now() {
    rusage usage = {};
    ::getrusage(RUSAGE_SELF, &usage);
    const auto seconds = [](const timeval& time) {
      return static_cast<double>(time.tv_sec) + 1e-6 * static_cast<double>(time.tv_usec);
    };
    return seconds(usage.ru_utime) + seconds(usage.ru_stime);
  }

  double clock_start_ = clock_now();
  double cpu_start_ = cpu_now();
};

void keep_best(Times& best, const Times& times) {
  best.seconds = std::min(best.seconds, times.seconds);
  best.cpu_seconds = std::min(best.cpu_seconds, times.cpu_seconds);
}

/// One row of an invented co-operative's meter readings: figures of all usual lengths, a few missing, one text.
std::string meter_row(std::mt19937_64& random) {
  static const char* const kKinds[] = {"apples", "pears", "plums", "mixed fruit", "empty"};
  std::normal_distribution<double> normal;
  const auto skewed = [&](double location, double scale) { return std::exp(location + scale * normal(random)); };
  char row[512];
  const int length = std::snprintf(row, sizeof row, "%d,%.2f,%.1f,%.3f,%.0f,%.4f,%.6g,%.15g,%.2f,%s\n",
                                   static_cast<int>(random() % 420), skewed(10, 1), 100 * normal(random),
                                   skewed(2, 0.5), skewed(6, 1), normal(random), skewed(0, 3), normal(random),
                                   20 + 10 * normal(random), kKinds[random() % std::size(kKinds)]);
  std::string text(row, static_cast<std::size_t>(length));
  // Written "nan" so that every reader can take it.
  const std::size_t cell = text.find(',') + 1;
  if (random() % 50 == 0) text.replace(cell, text.find(',', cell) - cell, "nan");
  return text;
}

void write_table(const std::string& path, std::size_t megabytes) {
  if (std::filesystem::exists(path)) return;
  std::cout << "writing " << path << "\n";
  const std::string unfinished = path + ".part";
  std::ofstream file(unfinished, std::ios::binary);
  file << "store,energy_kwh,balance,rain,throughput,drift,leak,phase,outdoor,kind\n";
  std::mt19937_64 random(20261201);
  for (std::size_t written = 0; written < megabytes * 1'000'000;) {
    const std::string row = meter_row(random);
    file << row;
    written += row.size();
  }
  file.close();
  std::filesystem::rename(unfinished, path);
}

Outcome read_with_formsieve(const std::string& path, unsigned threads) {
  Outcome outcome;
  CsvOptions options;
  options.threads = threads;
  options.missing = {"nan"};
  for (int i = 0; i < kRepeats; ++i) {
    const Stopwatch stopwatch;
    const formsieve::Result<Table> table = formsieve::table::read_csv(path, options);
    keep_best(outcome.times, stopwatch.read());
    if (!table) {
      std::cerr << table.error().message << ": " << table.error().where << "\n";
      std::exit(1);
    }
    outcome.n_rows = table->n_rows;
    outcome.sums = {};
    for (std::size_t c = 0; c < kNumericColumns; ++c)
      for (const double x : table->columns[c].numbers)
        if (!std::isnan(x)) outcome.sums[c] += x;
  }
  return outcome;
}

/// The general way: lines, cells, strtod, a string for each text.
Outcome read_plainly(const std::string& path) {
  Outcome outcome;
  const Stopwatch stopwatch;
  std::ifstream file(path);
  std::vector<std::vector<double>> columns(kNumericColumns);
  std::vector<std::string> texts;
  std::string line;
  std::getline(file, line);
  while (std::getline(file, line)) {
    std::size_t at = 0;
    for (std::vector<double>& column : columns) {
      const std::size_t end = line.find(',', at);
      column.push_back(std::strtod(line.c_str() + at, nullptr));
      at = end + 1;
    }
    texts.push_back(line.substr(at));
  }
  outcome.times = stopwatch.read();
  outcome.n_rows = texts.size();
  for (std::size_t c = 0; c < kNumericColumns; ++c)
    for (const double x : columns[c])
      if (!std::isnan(x)) outcome.sums[c] += x;
  return outcome;
}

/// Times of numpy.loadtxt for the numeric columns; infinite where there is no NumPy.
Times times_of_numpy(const std::string& path) {
  for (const char* python : {"/usr/bin/python3", "python3"}) {
    const std::string command = std::string(python) +
                                " -c \"import sys, time, numpy; start, cpu = time.perf_counter(), time.process_time(); "
                                "numpy.loadtxt(sys.argv[1], delimiter=',', skiprows=1, usecols=range(9)); "
                                "print(time.perf_counter() - start, time.process_time() - cpu)\" '" +
                                path + "' 2>/dev/null";
    std::FILE* const pipe = ::popen(command.c_str(), "r");
    Times times;
    const bool is_read = pipe != nullptr && std::fscanf(pipe, "%lf %lf", &times.seconds, &times.cpu_seconds) == 2;
    if (pipe != nullptr) ::pclose(pipe);
    if (is_read) return times;
  }
  return {};
}

double peak_megabytes() {
  rusage usage = {};
  ::getrusage(RUSAGE_SELF, &usage);
  return static_cast<double>(usage.ru_maxrss) / 1000.0;
}

void print_line(const std::string& reader, const Times& times, double megabytes, const Times& plain) {
  std::printf("%-32s %7.3f s %7.1f MB/s %7.1f times the plain reader | CPU %7.3f s %7.1f MB/s %7.1f times\n",
              reader.c_str(), times.seconds, megabytes / times.seconds, plain.seconds / times.seconds,
              times.cpu_seconds, megabytes / times.cpu_seconds, plain.cpu_seconds / times.cpu_seconds);
}

}  // namespace

int main(int argc, char** argv) {
  const std::size_t megabytes = argc > 1 ? std::stoul(argv[1]) : 200;
  const std::filesystem::path folder =
      argc > 2 ? std::filesystem::path(argv[2]) : std::filesystem::temp_directory_path();
  const std::string path = (folder / ("formsieve-table-bench-" + std::to_string(megabytes) + ".csv")).string();
  write_table(path, megabytes);
  const double size = static_cast<double>(std::filesystem::file_size(path)) / 1e6;

  const unsigned threads = formsieve::base::available_threads();
  const Outcome one = read_with_formsieve(path, 1);
  const Outcome all = read_with_formsieve(path, threads);
  const double peak = peak_megabytes();
  const Outcome plain = read_plainly(path);
  const Times numpy = times_of_numpy(path);

  std::printf("%.1f MB, %zu rows, %zu columns; best of %d\n", size, one.n_rows, kNumericColumns + 1, kRepeats);
  print_line("read_csv, 1 thread", one.times, size, plain.times);
  print_line("read_csv, " + std::to_string(threads) + " threads", all.times, size, plain.times);
  print_line("plain reader (getline, strtod)", plain.times, size, plain.times);
  if (std::isfinite(numpy.seconds)) print_line("numpy.loadtxt (numbers only)", numpy, size, plain.times);
  std::printf("peak memory of read_csv: %.0f MB\n", peak);
  const bool is_same = one.n_rows == plain.n_rows && one.sums == plain.sums && all.sums == plain.sums;
  std::printf("%s\n", is_same ? "all readers agree" : "READERS DISAGREE");
  return is_same ? 0 : 1;
}
