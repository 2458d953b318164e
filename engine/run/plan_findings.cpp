#include "run/plan_findings.hpp"

#include <algorithm>
#include <tuple>
#include <utility>

namespace formsieve::run {

Findings::Findings(std::string path) : path_(path.empty() ? "plan" : std::move(path)) {}

void Findings::place(const std::string& key, toml::source_position at) { places_.emplace(key, at); }

toml::source_position Findings::place_of(const std::string& key) const {
  const auto found = places_.find(key);
  return found != places_.end() ? found->second : toml::source_position{1, 1};
}

void Findings::refuse(toml::source_position at, std::string message, std::string hint) {
  problems_.push_back({at, std::move(message), std::move(hint)});
}

void Findings::refuse_key(const std::string& key, std::string message, std::string hint) {
  refuse(place_of(key), std::move(message), std::move(hint));
}

Error Findings::earliest() const {
  const auto earlier = [](const Problem& a, const Problem& b) {
    return std::tie(a.at.line, a.at.column) < std::tie(b.at.line, b.at.column);
  };
  const Problem& first = *std::min_element(problems_.begin(), problems_.end(), earlier);
  return {ErrorKind::plan, first.message, where(first.at), first.hint};
}

std::string Findings::where(toml::source_position at) const {
  return path_ + ":" + std::to_string(at.line) + ":" + std::to_string(at.column);
}

std::map<std::string, std::string> Findings::all_places() const {
  std::map<std::string, std::string> out;
  for (const auto& [key, at] : places_) out.emplace(key, where(at));
  return out;
}

}  // namespace formsieve::run
