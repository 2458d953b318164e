#include "proof/open_nodes.hpp"

#include <algorithm>

namespace formsieve::proof {

bool OpenNodes::later(const Node& a, const Node& b) {
  if (a.lower != b.lower) return a.lower > b.lower;
  return a.number > b.number;
}

void OpenNodes::limit(std::size_t bytes, std::size_t n_predictors, std::size_t n_columns) {
  // siblings share what they inherit; a branching has two or more of them
  const std::size_t per_predictor = (n_columns + n_predictors) / std::max<std::size_t>(n_predictors, 1);
  const std::size_t inherited = sizeof(double) * n_columns * (per_predictor + 2) / 2;
  most_queued_ = std::max<std::size_t>(bytes / (sizeof(Node) + sizeof(Actions) * n_predictors + inherited), 1);
}

std::uint64_t OpenNodes::push(Node node) {
  node.number = next_number_++;
  if (queue_.size() >= most_queued_) {
    stack_.push_back(std::move(node));
  } else {
    queue_.push_back(std::move(node));
    std::push_heap(queue_.begin(), queue_.end(), later);
  }
  return next_number_ - 1;
}

std::vector<Node> OpenNodes::pop(std::size_t most) {
  std::vector<Node> nodes;
  while (nodes.size() < most && !stack_.empty()) {
    nodes.push_back(std::move(stack_.back()));
    stack_.pop_back();
  }
  while (nodes.size() < most && !queue_.empty()) {
    std::pop_heap(queue_.begin(), queue_.end(), later);
    nodes.push_back(std::move(queue_.back()));
    queue_.pop_back();
  }
  return nodes;
}

void OpenNodes::cut_above(double limit) {
  const auto dead = [&](const Node& node) { return node.lower > limit; };
  if (!queue_.empty() && dead(queue_.front())) queue_.clear();
  while (!stack_.empty() && dead(stack_.back())) stack_.pop_back();
}

void OpenNodes::clear() {
  queue_.clear();
  stack_.clear();
}

double OpenNodes::lower() const {
  double lower = queue_.empty() ? std::numeric_limits<double>::infinity() : queue_.front().lower;
  for (const Node& node : stack_) lower = std::min(lower, node.lower);
  return lower;
}

double OpenNodes::lower(std::size_t response) const {
  double lower = std::numeric_limits<double>::infinity();
  for (const std::vector<Node>* nodes : {&queue_, &stack_})
    for (const Node& node : *nodes)
      if (node.response == response) lower = std::min(lower, node.lower);
  return lower;
}

bool OpenNodes::has(std::size_t response) const {
  const auto of_it = [&](const Node& node) { return node.response == response; };
  return std::any_of(queue_.begin(), queue_.end(), of_it) || std::any_of(stack_.begin(), stack_.end(), of_it);
}

}  // namespace formsieve::proof
