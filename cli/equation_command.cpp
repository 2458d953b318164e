// formsieve equation RUN RANK: one candidate's equation, ready to paste elsewhere.
#include "commands.hpp"

#include "arguments.hpp"
#include "failure.hpp"
#include "help_page.hpp"
#include "output_file.hpp"

#include <formsieve/pipeline.hpp>
#include <formsieve/report.hpp>

#include <algorithm>
#include <array>
#include <memory>

namespace formsieve::cli {
namespace {

struct EquationArguments {
  std::string run_folder, rank;
  std::string language = "text";
  std::optional<std::string> out;
  bool replace = false;
};

constexpr std::array<std::pair<const char*, report::CodeLanguage>, 5> kLanguages = {{
    {"text", report::CodeLanguage::text},
    {"spreadsheet", report::CodeLanguage::spreadsheet},
    {"sql", report::CodeLanguage::sql},
    {"c", report::CodeLanguage::c},
    {"python", report::CodeLanguage::python},
}};

// The part before the line break is the complaint, that after it what to type.
std::string known_language(const std::string& text) {
  std::vector<std::string> names;
  for (const auto& [name, language] : kLanguages) names.emplace_back(name);
  if (std::find(names.begin(), names.end(), text) != names.end()) return {};
  const std::optional<std::string> near = run::nearest(text, names);
  return "'" + text + "' is not known\n" + (near ? "did you mean " + *near + "? It is " : "give ") +
         "one of text, spreadsheet, sql, c, python";
}

report::CodeLanguage language_of(const std::string& name) {
  return std::find_if(kLanguages.begin(), kLanguages.end(), [&](const auto& known) { return known.first == name; })
      ->second;
}

// Ratio of corrected to uncorrected predictions, as the shortlist has it.
std::optional<double> smearing_factor(const judge::Shortlist& shortlist, const model::Model& model) {
  for (const judge::Candidate& candidate : shortlist.candidates)
    if (candidate.rank == model.rank) return candidate.back.smearing_factor;
  return std::nullopt;
}

int write_code(const EquationArguments& arguments, const std::string& text) {
  if (!arguments.out) return write_result(text);
  Result<OutputFile> file = OutputFile::open(*arguments.out, arguments.replace);
  if (!file) return refused(file.error(), {});
  if (const Status status = file->finish(text); !status) return refused(status.error(), {});
  return kDone;
}

int run_equation(const EquationArguments& arguments) {
  const Result<model::ModelSet> set = pipeline::open_models(arguments.run_folder);
  if (!set) return refused(set.error(), {}, true);
  const Result<const model::Model*> model = pipeline::find_model(*set, arguments.rank);
  if (!model) return refused(model.error(), {}, true);
  const Result<judge::Shortlist> shortlist = pipeline::open_run(arguments.run_folder);
  if (!shortlist) return refused(shortlist.error(), {}, true);
  const auto text =
      report::equation_code(*set, **model, language_of(arguments.language), smearing_factor(*shortlist, **model));
  if (!text) return refused(text.error(), {});
  return write_code(arguments, *text);
}

}  // namespace

void add_equation_command(CLI::App& program, Action& chosen) {
  const auto arguments = std::make_shared<EquationArguments>();
  CLI::App* command = program.add_subcommand("equation", "writes one equation to paste elsewhere");
  const auto help = std::make_shared<HelpPage>();
  help->usage = "equation RUN RANK";
  help->notes = {"Gives the mean in own units; an input that is missing or outside a form's domain gives no value."};
  help->example = {"formsieve equation coldstores.run recommended --as python"};
  command->formatter(help);
  command->set_help_flag("--help,-h", "this page");
  command->add_option("RUN", arguments->run_folder, "the run folder of a search")->required();
  command->add_option("RANK", arguments->rank, "a rank, or a named line: best, recommended, simplest, 'lowest AIC'")
      ->required();
  command->add_option("--as", arguments->language, "text (the default), spreadsheet, sql, c or python")
      ->type_name("LANGUAGE")
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeLast)
      ->check(known_language);
  command->add_option("--out", arguments->out, "a file to write instead of standard output")
      ->type_name("FILE")
      ->multi_option_policy(CLI::MultiOptionPolicy::TakeLast);
  command->add_flag("--replace", arguments->replace, "an existing file may be overwritten");
  command->callback([arguments, &chosen] { chosen = [arguments] { return run_equation(*arguments); }; });
}

}  // namespace formsieve::cli
