#include "daemon/http/api.hpp"

#include <algorithm>

#include "daemon/http/acknowledgement.hpp"
#include "daemon/http/etag.hpp"
#include "daemon/http/intake_parameters.hpp"
#include "daemon/http/intervention_body.hpp"
#include "daemon/http/media_type.hpp"
#include "daemon/http/openapi.hpp"
#include "daemon/http/parameters.hpp"
#include "daemon/http/problem.hpp"
#include "daemon/render/alert_record_json.hpp"
#include "daemon/render/chart_json.hpp"
#include "daemon/render/comparison_json.hpp"
#include "daemon/render/files_json.hpp"
#include "daemon/render/health_json.hpp"
#include "daemon/render/intervention_json.hpp"
#include "daemon/render/message_json.hpp"
#include "daemon/render/metrics_text.hpp"
#include "daemon/render/open_metrics.hpp"
#include "daemon/render/readings_text.hpp"
#include "daemon/render/status_json.hpp"

namespace agreed {
namespace {

constexpr auto kLongestWait = std::chrono::seconds(5);

HttpAnswer json_answer(std::string body) {
  HttpAnswer answer{200, "application/json", std::move(body), "", {}};
  answer.etag = etag_of(answer.body);
  return answer;
}

/// `answer` with a link to the following page, if there is one (RFC 8288).
HttpAnswer with_next(HttpAnswer answer, const Target& target, const std::optional<std::string>& next) {
  if (next) answer.headers.emplace_back("Link", "<" + next_page(target, *next) + R"(>; rel="next")");
  return answer;
}

/// What `rows_of` gives for the query, cut to one page, and the cursor of the next, if there is one: one row
/// more than asked for shows that.
template <class Query, class RowsOf, class CursorOf>
auto page_of(Query query, const RowsOf& rows_of, const CursorOf& cursor_of) {
  const auto limit = static_cast<std::size_t>(query.limit);
  ++query.limit;
  auto rows = rows_of(query);
  std::optional<std::string> next;
  if (rows.size() > limit) {
    rows.resize(limit);
    next = cursor_of(rows.back());
  }
  return std::pair(std::move(rows), std::move(next));
}

HttpAnswer no_such_alert(const HttpRequest& request, const std::string& id) {
  return problem(404, "There is no alert " + id + ".", request.target);
}

HttpAnswer unavailable(const HttpRequest& request, const std::string& why) {
  HttpAnswer answer = problem(503, why, request.target);
  answer.headers.emplace_back("Retry-After", "5");
  return answer;
}

std::optional<ChartIndex> find_chart(const Settings& settings, const Target& target) {
  for (std::uint32_t i = 0; i < settings.charts.size(); ++i) {
    const ChartSettings& chart = settings.charts[i];
    if (settings.of(chart.analyzer).id == target.segments[2] &&
        settings.of(chart.standard).id == target.segments[3] &&
        settings.of(chart.measurand).id == target.segments[4])
      return ChartIndex{i};
  }
  return std::nullopt;
}

std::optional<ComparisonIndex> find_comparison(const Settings& settings, const std::string& id) {
  for (std::uint32_t i = 0; i < settings.comparisons.size(); ++i)
    if (settings.comparisons[i].id == id) return ComparisonIndex{i};
  return std::nullopt;
}

}  // namespace

Api::Api(Service& service, Tokens& tokens, AlertSource alerts, IntakeSource intake,
         std::function<bool()> stopping)
    : service_(service),
      tokens_(tokens),
      alerts_(std::move(alerts)),
      intake_(std::move(intake)),
      stopping_(std::move(stopping)) {}

HttpAnswer Api::status(const HttpRequest&, const Target&) {
  const auto snapshot = service_.snapshot();
  return cache_.get(snapshot, "status", [&] { return status_json(*snapshot); });
}

HttpAnswer Api::charts(const HttpRequest& request, const Target& target) {
  const auto points = count_parameter(target, "points");
  if (!points.error.empty()) return problem(400, points.error, request.target);
  const auto snapshot = service_.snapshot();
  return cache_.get(snapshot, "charts/" + std::to_string(points.value),
                    [&] { return charts_json(*snapshot, points.value); });
}

HttpAnswer Api::chart(const HttpRequest& request, const Target& target) {
  const auto points = count_parameter(target, "points");
  if (!points.error.empty()) return problem(400, points.error, request.target);
  const auto snapshot = service_.snapshot();
  const auto index = find_chart(*snapshot->settings, target);
  if (!index)
    return problem(404, "There is no chart of this analyzer, check standard and measurand.", request.target);
  return cache_.get(snapshot, "chart/" + std::to_string(index->value) + "/" + std::to_string(points.value),
                    [&] { return chart_json(*snapshot, *index, points.value); });
}

HttpAnswer Api::comparisons(const HttpRequest& request, const Target& target) {
  const auto pairs = count_parameter(target, "pairs");
  if (!pairs.error.empty()) return problem(400, pairs.error, request.target);
  const auto snapshot = service_.snapshot();
  return cache_.get(snapshot, "comparisons/" + std::to_string(pairs.value),
                    [&] { return comparisons_json(*snapshot, pairs.value); });
}

HttpAnswer Api::comparison(const HttpRequest& request, const Target& target) {
  const auto pairs = count_parameter(target, "pairs");
  if (!pairs.error.empty()) return problem(400, pairs.error, request.target);
  const auto snapshot = service_.snapshot();
  const auto index = find_comparison(*snapshot->settings, target.segments[2]);
  if (!index) return problem(404, "There is no comparison of this name.", request.target);
  return cache_.get(snapshot,
                    "comparison/" + std::to_string(index->value) + "/" + std::to_string(pairs.value),
                    [&] { return comparison_json(*snapshot, *index, pairs.value); });
}

HttpAnswer Api::alerts(const HttpRequest& request, const Target& target) {
  const auto query = alert_query(target);
  if (!query.error.empty()) return problem(400, query.error, request.target);
  const auto [records, next] = page_of(query.value, alerts_.alerts, [](const AlertRecord& record) {
    return std::to_string(alert_record_id(record));
  });
  return json_answer(alert_records_json(records, next));
}

HttpAnswer Api::alert(const HttpRequest& request, const Target& target) {
  const auto id = whole_number(target.segments[2]);
  const auto record = id ? alerts_.alert(*id) : std::nullopt;
  if (!record) return no_such_alert(request, target.segments[2]);
  return json_answer(alert_record_json(*record));
}

HttpAnswer Api::acknowledge(const HttpRequest& request, const Target& target) {
  AcknowledgeBody body = read_acknowledge(request.body);
  if (!body.error.empty()) return problem(400, body.error, request.target);
  const auto id = whole_number(target.segments[2]);
  if (!id) return no_such_alert(request, target.segments[2]);
  AskAnswer asked;
  if (auto refusal = refused_by(
          request, [&] { return service_.acknowledge(*id, std::move(body.by), std::move(body.note)); },
          asked))
    return *std::move(refusal);
  HttpAnswer answer = alert(request, target);
  answer.etag.clear();
  return answer;
}

HttpAnswer Api::resend(const HttpRequest& request, const Target& target) {
  const std::string& message = target.segments[2];
  AskAnswer asked;
  if (auto refusal = refused_by(
          request, [&] { return service_.resend(message); }, asked))
    return *std::move(refusal);
  return {202, "application/json", queued_message_json(message, asked.words), "", {}};
}

HttpAnswer Api::intervene(const HttpRequest& request, const Target&) {
  InterventionBody body = read_intervention_body(request.body);
  if (!body.error.empty()) return problem(400, body.error, request.target, body.field);
  AskAnswer asked;
  if (auto refusal = refused_by(
          request, [&] { return service_.intervene(std::move(body.told)); }, asked))
    return *std::move(refusal);
  const int status = asked.outcome == AskOutcome::done ? 201 : 200;
  return {status, "application/json", intervention_json(asked.intervention.value()), "", {}};
}

std::optional<HttpAnswer> Api::refused_by(const HttpRequest& request,
                                          const std::function<std::future<AskAnswer>()>& ask,
                                          AskAnswer& answer) {
  if (!waiting_places_.try_acquire())
    return unavailable(request, "Other requests are still waiting to be stored; try again.");
  std::optional<AskAnswer> asked;
  try {
    asked = wait_for(ask());
  } catch (const std::exception&) {
    asked = AskAnswer{AskOutcome::unavailable, "It could not be stored; try again."};
  }
  waiting_places_.release();
  if (!asked) return unavailable(request, "It is not stored yet and may still be; look again.");
  answer = *std::move(asked);
  switch (answer.outcome) {
    case AskOutcome::done:
    case AskOutcome::done_before:
      return std::nullopt;
    case AskOutcome::not_usable:
      return problem(422, answer.field + ": " + answer.words, request.target, answer.field);
    case AskOutcome::not_found:
      return problem(404, answer.words.empty() ? "There is no such thing." : answer.words, request.target);
    case AskOutcome::not_possible:
      return problem(409, answer.words, request.target);
    case AskOutcome::unavailable:
      break;
  }
  return unavailable(request, answer.words);
}

std::optional<AskAnswer> Api::wait_for(std::future<AskAnswer> asked) const {
  const auto last = std::chrono::steady_clock::now() + kLongestWait;
  while (asked.wait_for(std::chrono::milliseconds(50)) != std::future_status::ready)
    if (stopping_() || std::chrono::steady_clock::now() > last) return std::nullopt;
  return asked.get();
}

HttpAnswer Api::files(const HttpRequest& request, const Target& target) {
  const auto query = file_query(target);
  if (!query.error.empty()) return problem(400, query.error, request.target);
  const auto [files, next] =
      page_of(query.value, intake_.files, [](const FileRow& file) { return std::to_string(file.id); });
  if (auto refusal = refused_empty(files.empty(), request, target)) return *std::move(refusal);
  return with_next(json_answer(files_json(files, next)), target, next);
}

HttpAnswer Api::readings(const HttpRequest& request, const Target& target) {
  const auto query = reading_query(target);
  if (!query.error.empty()) return problem(400, query.error, request.target);
  const auto [readings, next] = page_of(query.value, intake_.readings, reading_cursor);
  if (auto refusal = refused_empty(readings.empty(), request, target)) return *std::move(refusal);
  const bool csv = prefers_csv(request.accept);
  HttpAnswer answer = json_answer(csv ? readings_csv(readings) : readings_json(readings, next));
  if (csv) answer.content_type = "text/csv; charset=utf-8; header=present";
  answer.headers.emplace_back("Vary", "Accept");
  return with_next(std::move(answer), target, next);
}

std::optional<HttpAnswer> Api::refused_empty(bool empty, const HttpRequest& request,
                                             const Target& target) const {
  const std::string unknown = empty ? unknown_name(target, *service_.snapshot()->settings) : "";
  if (unknown.empty()) return std::nullopt;
  return problem(400, unknown, request.target);
}

HttpAnswer Api::openapi(const HttpRequest&, const Target&) {
  static const HttpAnswer answer = json_answer(openapi_document());
  return answer;
}

HttpAnswer Api::metrics(const HttpRequest&, const Target&) {
  const auto snapshot = service_.snapshot();
  const auto render = [&] {
    std::optional<std::vector<MessageCount>> messages;
    try {
      messages = alerts_.messages();
    } catch (const JournalError&) {
      // Whoever watches must hear of everything else, of `ready` above all.
    }
    return metrics_text(*snapshot, messages);
  };
  return cache_.get(snapshot, "metrics", render, kOpenMetricsType);
}

HttpAnswer Api::live(const HttpRequest&, const Target&) {
  return json_answer(live_json());
}

HttpAnswer Api::ready(const HttpRequest& request, const Target&) {
  const auto snapshot = service_.snapshot();
  if (snapshot->ready) {
    // Without tokens results are taken in and alerts are sent as ever: no reason not to be ready.
    std::vector<std::string> remarks = snapshot->remarks;
    if (std::string trouble = tokens_.trouble(); !trouble.empty()) remarks.push_back(std::move(trouble));
    return json_answer(ready_json(remarks));
  }
  return {503, "application/problem+json", not_ready_json(snapshot->not_ready, request.target), "", {}};
}

}  // namespace agreed
