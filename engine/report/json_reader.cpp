#include "report/json_reader.hpp"

#include <algorithm>
#include <charconv>
#include <utility>

namespace formsieve::report {

namespace {

using nlohmann::json;

constexpr const char* kHint = "the file was changed, cut short or written by another program: run the search again";

std::string kind_of(const json& value) {
  switch (value.type()) {
    case json::value_t::null:
      return "null";
    case json::value_t::object:
      return "an object";
    case json::value_t::array:
      return "a list";
    case json::value_t::string:
      return "text";
    case json::value_t::boolean:
      return "true or false";
    default:
      return "a number";
  }
}

/// "line 3, column 14" of a byte, counted from 1.
std::string place_of(const std::string& text, std::size_t byte) {
  const std::size_t end = std::min(byte > 0 ? byte - 1 : 0, text.size());
  const auto stop = text.begin() + static_cast<std::ptrdiff_t>(end);
  const auto line = std::count(text.begin(), stop, '\n') + 1;
  const std::size_t newline = end == 0 ? std::string::npos : text.rfind('\n', end - 1);
  const std::size_t column = newline == std::string::npos ? end + 1 : end - newline;
  return "line " + std::to_string(line) + ", column " + std::to_string(column);
}

}  // namespace

void Trouble::report(std::string message) {
  if (!first_) first_ = Error{ErrorKind::data, std::move(message), file_, kHint};
}

Node Node::at(const char* key) const {
  const Node node = get(key);
  // Below an absent node everything is absent: the first missing key has been reported.
  if (value_ != nullptr && value_->is_object() && !node.present()) node.report("is missing");
  return node;
}

Node Node::get(const char* key) const {
  const std::string path = path_.empty() ? key : path_ + "." + key;
  if (value_ == nullptr) return {nullptr, path, *trouble_};
  if (!value_->is_object()) {
    report("is " + kind_of(*value_) + ", and must be an object");
    return {nullptr, path, *trouble_};
  }
  const auto found = value_->find(key);
  return {found == value_->end() ? nullptr : &*found, path, *trouble_};
}

std::vector<Node> Node::items() const {
  std::vector<Node> out;
  if (value_ == nullptr) return out;
  if (!value_->is_array()) {
    report("is " + kind_of(*value_) + ", and must be a list");
    return out;
  }
  out.reserve(value_->size());
  for (const json& item : *value_) out.emplace_back(&item, path_ + "[" + std::to_string(out.size()) + "]", *trouble_);
  return out;
}

std::string Node::text() const {
  if (value_ == nullptr) return {};
  if (value_->is_string()) return value_->get_ref<const std::string&>();
  report("is " + kind_of(*value_) + ", and must be text");
  return {};
}

std::string Node::text_or_empty() const { return is_null() ? std::string() : text(); }

double Node::number(double when_null) const { return optional_number().value_or(when_null); }

std::optional<double> Node::optional_number() const {
  if (is_null()) return std::nullopt;
  if (value_->is_number()) return value_->get<double>();
  report("is " + kind_of(*value_) + ", and must be a number or null");
  return std::nullopt;
}

std::uint64_t Node::count(std::uint64_t when_absent) const {
  if (value_ == nullptr) return when_absent;
  if (value_->is_number_unsigned()) return value_->get<std::uint64_t>();
  if (value_->is_string()) {
    const auto& digits = value_->get_ref<const std::string&>();
    std::uint64_t count = 0;
    const auto [end, code] = std::from_chars(digits.data(), digits.data() + digits.size(), count);
    if (code == std::errc() && end == digits.data() + digits.size()) return count;
  }
  report("must be a whole number from 0");
  return when_absent;
}

bool Node::truth(bool when_absent) const {
  if (value_ == nullptr) return when_absent;
  if (value_->is_boolean()) return value_->get<bool>();
  report("is " + kind_of(*value_) + ", and must be true or false");
  return when_absent;
}

std::vector<std::string> Node::texts() const {
  std::vector<std::string> out;
  for (const Node& item : items()) out.push_back(item.text());
  return out;
}

Result<json> parse_json(const std::string& text, const std::string& file) {
  try {
    return json::parse(text);
  } catch (const json::parse_error& error) {
    return Error{ErrorKind::data, "the file is not JSON, at " + place_of(text, error.byte), file, kHint};
  } catch (const json::exception&) {
    return Error{ErrorKind::data, "the file holds a number that is out of range", file, kHint};
  }
}

}  // namespace formsieve::report
