#include "daemon/cli/command_line.hpp"

#include <algorithm>
#include <charconv>
#include <vector>

#include <CLI/CLI.hpp>

#include "config/nearest.hpp"
#include "config/value_text.hpp"
#include "daemon/cli/command_help.hpp"
#include "daemon/cli/time_argument.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/version.hpp"

namespace agreed {
namespace {

/// The names of the subcommands, for the nearest one to a mistyped word.
std::vector<std::string> names_of(const CLI::App& app) {
  std::vector<std::string> names;
  for (const CLI::App* command : app.get_subcommands({})) names.push_back(command->get_name());
  return names;
}

std::string unknown_command(const CLI::App& app, const std::string& word) {
  std::string text = "agreed: there is no command '" + word + "'";
  text += settings_file::did_you_mean(word, names_of(app));
  return text + "\nagreed --help lists them\n";
}

constexpr std::size_t kHashDigits = 64;

/// "17:" and 64 hexadecimal digits, as verify, /api/status and the documents show it.
std::optional<ChainHead> head_of(const std::string& text) {
  ChainHead head;
  const char* const end = text.data() + text.size();
  const auto [at, error] = std::from_chars(text.data(), end, head.sequence);
  if (error != std::errc{} || head.sequence < 0 || at == end || *at != ':') return std::nullopt;
  head.sha256.assign(at + 1, end);
  const bool is_hash = head.sha256.size() == kHashDigits &&
                       head.sha256.find_first_not_of("0123456789abcdef") == std::string::npos;
  return is_hash ? std::optional(head) : std::nullopt;
}

/// A command that reads a configuration.
CLI::App& add_command(CLI::App& app, const char* name, const char* what, std::filesystem::path& config) {
  CLI::App& sub = *app.add_subcommand(name, what);
  sub.add_option("CONFIG", config, "the configuration file")->required();
  return sub;
}

void add_json(CLI::App& sub, bool& json) {
  sub.add_flag("--json", json, "print for programs");
}

void add_run(CLI::App& app, RunCommand& run) {
  add_command(app, "run", "the service, in the foreground; SIGTERM or Ctrl-C ends it", run.config)
      .footer("Example:\n  agreed run /etc/agreed/agreed.yaml");
}

void add_check(CLI::App& app, CheckCommand& check) {
  CLI::App& sub = add_command(
      app, "check",
      "validates a configuration and shows the values in effect, or how a sample file would be read",
      check.config);
  add_json(sub, check.json);
  CLI::Option* const sample =
      sub.add_option("--sample", check.sample, "show how this file would be read, row by row")
          ->type_name("FILE");
  CLI::Option* const analyzer =
      sub.add_option("--analyzer", check.analyzer, "whose file the sample is: an id of analyzers")
          ->type_name("ID");
  sample->needs(analyzer);
  analyzer->needs(sample);
  sub.footer(
      "Example:\n  agreed check /etc/agreed/agreed.yaml\n"
      "  agreed check /etc/agreed/agreed.yaml --sample export.csv --analyzer line2\n\n"
      "With --sample nothing is taken in; exit status 1 if a row could not be used.");
}

void add_example(CLI::App& app, ExampleCommand& example) {
  CLI::App& sub = *app.add_subcommand(
      "example", "writes a complete working configuration and a day's drop files to start from");
  sub.add_option("DIR", example.folder, "a folder that does not exist yet, or is empty")->required();
  sub.footer("Example:\n  agreed example mill");
}

void add_verify(CLI::App& app, VerifyCommand& verify) {
  CLI::App& sub = add_command(
      app, "verify", "proves that nothing in the journal was changed and nothing is missing", verify.config);
  sub.add_option_function<std::vector<std::string>>(
         "--head",
         [&verify](const std::vector<std::string>& texts) {
           for (const std::string& text : texts) {
             const auto head = head_of(text);
             if (!head)
               throw CLI::ValidationError(
                   "--head",
                   "expected SEQUENCE:SHA256 as verify prints it (64 digits 0-9a-f), found '" + text + "'");
             verify.heads.push_back(*head);
           }
         },
         "a head of the chain noted elsewhere (\"chain\" in /api/status); a tail that was cut off or written "
         "anew "
         "shows only against one")
      ->type_name("SEQUENCE:SHA256");
  sub.add_option("--file", verify.file,
                 "a backup, or a journal that was put aside, instead of the service's own")
      ->type_name("FILE");
  add_json(sub, verify.json);
  sub.footer(
      "May run while the service does. Exit status: 0 nothing was changed, 1 something was or is missing,\n"
      "2 wrong use or configuration, 3 the journal could not be read.\n"
      "Example:\n  agreed verify /etc/agreed/agreed.yaml");
}

void add_backup(CLI::App& app, BackupCommand& backup) {
  CLI::App& sub =
      add_command(app, "backup", "copies the journal, also while the service runs", backup.config);
  sub.add_option("FILE", backup.file, "the copy; must not exist")->required();
  add_json(sub, backup.json);
  sub.footer(
      "The copy is whole and on the disk when this ends, and was verified.\n"
      "Exit status: 0 done, 1 copied, but the journal and so the copy has faults, 2 wrong use or "
      "configuration,\n"
      "3 could not do it (FILE exists, no room, ...).\n"
      "Example:\n  agreed backup /etc/agreed/agreed.yaml /backup/agreed-$(date +%F).sqlite");
}

void add_restore(CLI::App& app, RestoreCommand& restore) {
  CLI::App& sub =
      add_command(app, "restore", "puts a backup in the journal's place; what was there is kept beside it",
                  restore.config);
  sub.add_option("FILE", restore.file, "a file that `agreed backup` wrote")->required();
  add_json(sub, restore.json);
  sub.footer(
      "The service must be stopped. The backup is verified first.\n"
      "Exit status: 0 done, 1 nothing was done because the backup has faults, 2 wrong use or configuration,\n"
      "3 could not do it (the service runs, no such file, ...).\n"
      "Example:\n  agreed restore /etc/agreed/agreed.yaml /backup/agreed-2026-01-05.sqlite");
}

/// An option that takes a time.
template <class Take>
CLI::Option* add_time(CLI::App& sub, const char* name, const char* what, const Take& take) {
  const auto read = [name, take](const std::string& text) {
    const auto at = time_argument(text);
    if (!at)
      throw CLI::ValidationError(name, "expected " + std::string(kTimeForms) + ", found '" + text + "'");
    take(*at);
  };
  return sub.add_option_function<std::string>(name, read, what)->type_name("TIME");
}

void add_report(CLI::App& app, ReportCommand& report) {
  CLI::App& sub = add_command(
      app, "report", "writes the agreement record of a period: one page to print and keep, and its data",
      report.config);
  add_time(sub, "--from", "its beginning: a date, or a time with its offset", [&report](Instant at) {
    report.from = at;
  })->required();
  add_time(sub, "--to", "its end, not included; now if that is earlier, and without it",
           [&report](Instant at) { report.to = at; });
  sub.add_option("--out", report.out, "the page, FILE.html; its tables are written beside it as .csv")
      ->type_name("FILE")
      ->required();
  add_json(sub, report.json);
  sub.footer(
      "May run while the service does. Verdicts over time, charts, fits, pairs, alerts and who acknowledged\n"
      "them, interventions, rejected rows, configurations and the proof of the journal's chain. Nothing is\n"
      "written over. Exit status: 0 done, 1 written, but the period holds nothing or the journal has "
      "faults,\n"
      "2 wrong use or configuration (a file exists, an empty period), 3 could not do it.\n"
      "Example:\n  agreed report /etc/agreed/agreed.yaml --from 2026-01-01 --to 2026-02-01 --out "
      "record.html");
}

void add_token(CLI::App& app, TokenCommand& token) {
  CLI::App& sub = add_command(
      app, "token", "makes a token for the HTTP side, shows it once and stores its hash", token.config);
  sub.add_option_function<std::string>(
         "--role",
         [&token](const std::string& role) {
           if (role != "reader" && role != "operator")
             throw CLI::ValidationError("--role",
                                        "expected reader or operator, found '" + role + "'" +
                                            settings_file::did_you_mean(role, {"reader", "operator"}));
           token.role = role == "operator" ? Role::operator_ : Role::reader;
         },
         "reader: may read where the service asks for a token; operator: may also acknowledge alerts, send\n"
         "messages again, ...")
      ->type_name("reader|operator")
      ->required();
  sub.add_option("--name", token.name, "whose it is, for the tokens file; else the role and a number")
      ->type_name("NAME");
  add_json(sub, token.json);
  sub.footer(
      "The tokens file is access.tokens_file of the configuration; it holds hashes only. The service reads "
      "it\n"
      "again when it changes, so run this as the user of the service, or let it read the file.\n"
      "Exit status: 0 done, 2 wrong use or configuration (no tokens file, name taken), 3 it could not be "
      "stored.\n"
      "Example:\n  agreed token /etc/agreed/agreed.yaml --role operator --name shift-leader");
}

void add_send_test(CLI::App& app, SendTestCommand& test) {
  CLI::App& sub =
      add_command(app, "send-test", "sends a test message to a webhook and prints the answer", test.config);
  sub.add_option("ROUTE", test.route, "a name of alerts.routes; without it, every one");
  add_json(sub, test.json);
  sub.footer(
      "One event of type agreed.test, signed and sent as alerts are: redirects are not followed, "
      "certificates\n"
      "are verified, 10 s at most. It is not journalled and not tried again; the service need not run.\n"
      "Exit status: 0 delivered (answered 2xx), 1 not, 2 no such route, wrong use or configuration.\n"
      "Example:\n  agreed send-test /etc/agreed/agreed.yaml engineer");
}

void add_token_file(CLI::App& sub, std::filesystem::path& file) {
  sub.add_option("--token-file", file, "a file whose first line is the token; else AGREED_TOKEN is used")
      ->type_name("FILE");
}

void add_resend(CLI::App& app, ResendCommand& resend) {
  CLI::App& sub = add_command(
      app, "resend", "lets the running service send a message once more, under the same id", resend.config);
  sub.add_option("ID", resend.message, "the message: webhook-id, as deliveries of /api/alerts/{id} have it")
      ->required();
  add_token_file(sub, resend.token_file);
  sub.add_option("--url", resend.url, "where the service is, if not where the configuration says it listens")
      ->type_name("URL");
  add_json(sub, resend.json);
  sub.footer(
      "For a message that was given up (undeliverable), or one that arrived and was lost there. An endpoint\n"
      "that said it was gone (410) is tried again. Needs an operator token (agreed token): from "
      "--token-file,\n"
      "or from the environment variable AGREED_TOKEN; never as an argument, which others can see.\n"
      "Exit status: 0 queued, 1 no such message, or it waits to be sent anyway, 2 wrong use, configuration "
      "or\n"
      "token, 3 the service cannot be reached.\n"
      "Example:\n  agreed resend /etc/agreed/agreed.yaml msg_0123456789abcdef0123456789abcdef "
      "--token-file ~/.agreed-token");
}

void add_status(CLI::App& app, StatusCommand& status) {
  CLI::App& sub = *app.add_subcommand("status", "what the running service says, in one screen");
  sub.add_option("TARGET", status.target, "the configuration file, or the URL of a service")->required();
  add_token_file(sub, status.token_file);
  add_json(sub, status.json);
  sub.footer(
      "A service that can be reached from outside asks for a reader token (agreed token): from "
      "--token-file,\n"
      "or from the environment variable AGREED_TOKEN. --json prints /api/status as it is. Colour only on a\n"
      "terminal and unless NO_COLOR is set.\n"
      "Exit status: 0 everything agrees, 1 not everything, 2 wrong use, configuration or token,\n"
      "3 the service cannot be reached.\n"
      "Example:\n  agreed status /etc/agreed/agreed.yaml\n  agreed status http://127.0.0.1:7480 --json");
}

Period period_argument(const std::string& option, const std::vector<std::string>& ends) {
  std::vector<Instant> times;
  for (const std::string& text : ends) {
    const auto at = time_argument(text);
    if (!at)
      throw CLI::ValidationError(option, std::string("expected ") + kTimeForms + ", found '" + text + "'");
    times.push_back(*at);
  }
  if (times.at(0) >= times.at(1))
    throw CLI::ValidationError(option, "the first time must be before the second");
  return {times[0], times[1]};
}

void add_replay(CLI::App& app, ReplayCommand& replay) {
  CLI::App& sub = add_command(app, "replay",
                              "runs old readings through this configuration: which alerts it would have "
                              "raised, beside those raised then",
                              replay.config);
  sub.add_option("--from", replay.from,
                 "a journal (a backup, a state folder), or a folder with drop files in a folder for each "
                 "analyzer; else the journal of the configuration")
      ->type_name("DIR_OR_DATABASE");
  sub.add_option_function<std::vector<std::string>>(
         "--between",
         [&replay](const std::vector<std::string>& ends) {
           replay.between = period_argument("--between", ends);
         },
         "only alerts opened from A on and before B; what was measured before A is learned from")
      ->expected(2)
      ->type_name("A B");
  add_json(sub, replay.json);
  sub.footer(
      "Nothing is written; the service may run. Every reading counts as received when it was measured; what "
      "was\n"
      "taken back was never there. Two alerts of one kind and subject within a day of each other match.\n"
      "Exit status: 0 done, 1 there was nothing to replay, 2 wrong use or configuration, 3 it could not be "
      "read.\n"
      "Example:\n  agreed replay /etc/agreed/agreed.yaml --between 2026-01-01 2026-04-01\n"
      "  agreed replay /etc/agreed/agreed.yaml --from /backup/agreed-2026-01-05.sqlite\n"
      "  agreed replay /etc/agreed/agreed.yaml --from /srv/agreed/ --json");
}

/// "line1/protein=0.02" or "protein=0.02".
GivenSd given_sd(const std::string& text) {
  GivenSd given;
  const std::size_t equals = std::min(text.find('='), text.size()), slash = text.substr(0, equals).find('/');
  const bool of_one = slash != std::string::npos;
  if (of_one) given.analyzer = text.substr(0, slash);
  const std::size_t name = of_one ? slash + 1 : 0;
  given.measurand = text.substr(name, equals - name);
  given.sd = settings_file::number_of(text.substr(std::min(equals + 1, text.size()))).value_or(0);
  if (!(given.sd > 0) || given.measurand.empty() || slash == 0)
    throw CLI::ValidationError(
        "--sd", "expected MEASURAND=SD or ANALYZER/MEASURAND=SD with an SD above 0, found '" + text + "'");
  return given;
}

/// An option that takes a number above 0.
CLI::Option* add_positive(CLI::App& sub, const char* name, const char* what, std::optional<double>& value) {
  const auto read = [name, &value](const std::string& text) {
    value = settings_file::number_of(text);
    if (!value || !(*value > 0))
      throw CLI::ValidationError(name, "expected a number above 0, found '" + text + "'");
  };
  return sub.add_option_function<std::string>(name, read, what);
}

/// What people wish that a configuration did.
void add_wishes(CLI::App& sub, PlanCommand& plan) {
  add_positive(sub, "--false-alerts-per-year", "a wish: no more false alerts a year than this",
               plan.false_alerts_per_year)
      ->type_name("N");
  CLI::Option* const notice =
      add_positive(sub, "--notice",
                   "a wish: a shift of one analyzer by this, in the unit of the measurand ...", plan.notice)
          ->type_name("SIZE");
  const auto read_within = [&plan](const std::string& text) {
    plan.within = settings_file::duration_of(text);
    if (!plan.within || *plan.within <= Duration::zero())
      throw CLI::ValidationError("--within",
                                 "expected a time such as 24h, 30min or 7d, found '" + text + "'");
  };
  CLI::Option* const within = sub.add_option_function<std::string>(
                                     "--within", read_within, "... is noticed within this time, as 24h or 7d")
                                  ->type_name("DURATION");
  CLI::Option* const measurand =
      sub.add_option("--measurand", plan.measurand, "... of this measurand; needed if there are several")
          ->type_name("MEASURAND");
  notice->needs(within);
  within->needs(notice);
  measurand->needs(notice);
}

void add_trials(CLI::App& sub, PlanCommand& plan) {
  constexpr long long kFewest = 100, kMost = 100'000;
  const auto read = [&plan](const std::string& text) {
    const auto trials = settings_file::whole_number_of(text);
    if (!trials || *trials < kFewest || *trials > kMost)
      throw CLI::ValidationError("--trials", "expected a whole number from " + std::to_string(kFewest) +
                                                 " to " + std::to_string(kMost) + ", found '" + text + "'");
    plan.trials = static_cast<int>(*trials);
  };
  sub.add_option_function<std::string>(
         "--trials", read, "simulated for each figure, 1000 without it; four times as many halve its error")
      ->type_name("N");
}

void add_plan(CLI::App& app, PlanCommand& plan) {
  CLI::App& sub =
      add_command(app, "plan",
                  "what this configuration will do: its false alerts, how soon it notices a shift, how "
                  "many pairs show agreement; and which setting meets a wish",
                  plan.config);
  sub.add_option_function<std::vector<std::string>>(
         "--sd",
         [&plan](const std::vector<std::string>& texts) {
           for (const std::string& text : texts) plan.sds.push_back(given_sd(text));
         },
         "the sd of one reading, of a measurand on one analyzer (line1/protein=0.02) or on every one "
         "(protein=0.02); instead of what the journal has seen")
      ->type_name("NAME=SD")
      ->allow_extra_args(false);
  add_wishes(sub, plan);
  add_trials(sub, plan);
  add_json(sub, plan.json);
  sub.footer(
      "Nothing is written; the service may run, and there need be no journal yet. The same input gives the "
      "same\n"
      "figures; those that are simulated come with their error.\n"
      "Exit status: 0 done and every wish is met, 1 a wish is not met or nothing is configured to plan,\n"
      "2 wrong use or configuration, 3 the journal could not be read.\n"
      "Example:\n  agreed plan /etc/agreed/agreed.yaml\n"
      "  agreed plan /etc/agreed/agreed.yaml --sd protein=0.02 --sd line2/protein=0.025\n"
      "  agreed plan /etc/agreed/agreed.yaml --false-alerts-per-year 2 --notice 0.1 --within 24h "
      "--measurand protein");
}

/// Why a command line with an option that its command does not have was refused; CLI11 would rather speak of
/// what is missing.
std::optional<std::string> unknown_option(const CLI::App& command, std::span<const std::string> arguments) {
  std::vector<std::string> names;
  for (const CLI::Option* option : command.get_options())
    for (const std::string& name : option->get_lnames()) names.push_back("--" + name);
  for (const std::string& argument : arguments) {
    if (argument == "--") break;
    const std::string name = argument.substr(0, argument.find('='));
    if (!name.starts_with("--") || std::find(names.begin(), names.end(), name) != names.end()) continue;
    return "there is no option '" + name + "'" + settings_file::did_you_mean(name, names);
  }
  return std::nullopt;
}

/// What an unfit command line is told.
Say refusal(const CLI::App& app, std::span<const std::string> arguments, const std::string& error) {
  const auto used = app.get_subcommands();
  const CLI::App& command = used.empty() ? app : *used.front();
  const std::string help = used.empty() ? "agreed --help" : "agreed " + command.get_name() + " --help";
  return {kWrongUse,
          "agreed: " + unknown_option(command, arguments).value_or(error) + "\nsee " + help + '\n'};
}

CommandHelp help_of(const CLI::App& command) {
  CommandHelp help{command.get_name(), command.get_description(), {}, command.get_footer()};
  for (const CLI::Option* option : command.get_options()) {
    const bool is_option = option->nonpositional();
    const bool takes = is_option && option->get_type_size() > 0;
    help.arguments.push_back({option->get_name(!is_option), takes ? option->get_type_name() : "",
                              option->get_description(), is_option, option->get_required()});
  }
  return help;
}

/// Reads a command line, or, where `help` asks for it, tells what there is to read: of one and the same tree.
Command read_or_tell(std::span<const std::string> arguments, std::vector<CommandHelp>* help) {
  CLI::App app{
      "agreed keeps two production analyzers, whose results are used as one, true to each other:\n"
      "it watches their drop folders, charts their check standards, fits their split samples\n"
      "and calls out when they stop agreeing.",
      "agreed"};
  app.set_version_flag("--version", std::string("agreed ") + version());
  app.require_subcommand(1);
  app.footer(
      "Example:\n  agreed example mill && agreed check mill/agreed.yaml && agreed run mill/agreed.yaml\n\n"
      "Exit status: 0 done, 1 the answer is no, 2 wrong use or configuration, 3 could not do it.");

  RunCommand run;
  add_run(app, run);
  CheckCommand check;
  add_check(app, check);
  ExampleCommand example;
  add_example(app, example);
  VerifyCommand verify;
  add_verify(app, verify);
  BackupCommand backup;
  add_backup(app, backup);
  RestoreCommand restore;
  add_restore(app, restore);
  ReportCommand report;
  add_report(app, report);
  TokenCommand token;
  add_token(app, token);
  SendTestCommand send_test;
  add_send_test(app, send_test);
  ResendCommand resend;
  add_resend(app, resend);
  StatusCommand status;
  add_status(app, status);
  ReplayCommand replay;
  add_replay(app, replay);
  PlanCommand plan;
  add_plan(app, plan);

  if (help != nullptr) {
    help->push_back(help_of(app));
    for (const CLI::App* command : app.get_subcommands({})) help->push_back(help_of(*command));
    return Say{};
  }
  if (!arguments.empty() && !arguments.front().starts_with('-')) {
    const auto names = names_of(app);
    if (std::find(names.begin(), names.end(), arguments.front()) == names.end())
      return Say{kWrongUse, unknown_command(app, arguments.front())};
  }
  try {
    app.parse(std::vector<std::string>(arguments.rbegin(), arguments.rend()));  // CLI11 wants them reversed
  } catch (const CLI::CallForVersion& call) {
    return Say{kDone, std::string(call.what()) + '\n'};
  } catch (const CLI::CallForHelp&) {
    return Say{kDone, app.help()};
  } catch (const CLI::ParseError& error) {
    return refusal(app, arguments, error.what());
  }
  if (app.got_subcommand("run")) return run;
  if (app.got_subcommand("check")) return check;
  if (app.got_subcommand("verify")) return verify;
  if (app.got_subcommand("backup")) return backup;
  if (app.got_subcommand("restore")) return restore;
  if (app.got_subcommand("report")) return report;
  if (app.got_subcommand("token")) return token;
  if (app.got_subcommand("send-test")) return send_test;
  if (app.got_subcommand("resend")) return resend;
  if (app.got_subcommand("status")) return status;
  if (app.got_subcommand("replay")) return replay;
  if (app.got_subcommand("plan")) return plan;
  return example;
}

}  // namespace

Command parse_command_line(std::span<const std::string> arguments) {
  return read_or_tell(arguments, nullptr);
}

std::vector<CommandHelp> command_help() {
  std::vector<CommandHelp> help;
  read_or_tell({}, &help);
  return help;
}

}  // namespace agreed
