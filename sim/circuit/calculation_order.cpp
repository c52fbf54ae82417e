#include "sim/circuit/calculation_order.hpp"

#include <algorithm>
#include <functional>

#include "sim/circuit/torn_stream.hpp"

namespace leat {
namespace {

// The first inlet of `unit` that comes from a unit without hold-up goes through a torn stream.
void tear(Circuit& circuit, int unit) {
  for (int& s : circuit.units[unit].takes) {
    const int source = circuit.streams[s].source;
    if (source < 0 || circuit.units[source].operation->traits().hold_up) continue;
    CircuitUnit made;
    made.name = circuit.streams[s].name + " (torn)";
    made.kind = "torn stream";
    made.operation = std::make_shared<TornStream>(circuit.context->layout.size());
    made.torn = true;
    made.takes = {s};
    made.first_stream = static_cast<int>(circuit.streams.size());
    circuit.streams[s].taker = static_cast<int>(circuit.units.size());
    CircuitStream stream;
    stream.name = circuit.streams[s].name + " (torn)";
    stream.source = static_cast<int>(circuit.units.size());
    stream.taker = unit;
    stream.temperature = circuit.streams[s].temperature;
    s = static_cast<int>(circuit.streams.size());
    circuit.streams.push_back(stream);
    circuit.units.push_back(made);
    return;
  }
}

void place_holding(Circuit& circuit) {
  // Breadth-first from the feeds, so that a sweep meets each vessel after what feeds it.
  std::vector<int> distance(circuit.units.size(), 1 << 20), queue;
  for (const CircuitStream& stream : circuit.streams)
    if (stream.source < 0 && stream.taker >= 0 && distance[stream.taker] > 0) {
      distance[stream.taker] = 0;
      queue.push_back(stream.taker);
    }
  for (std::size_t at = 0; at < queue.size(); ++at)
    for (const CircuitStream& stream : circuit.streams)
      if (stream.source == queue[at] && stream.taker >= 0 && distance[stream.taker] == 1 << 20) {
        distance[stream.taker] = distance[queue[at]] + 1;
        queue.push_back(stream.taker);
      }
  for (std::size_t u = 0; u < circuit.units.size(); ++u)
    if (circuit.units[u].operation->traits().hold_up) circuit.holding.push_back(static_cast<int>(u));
  std::stable_sort(circuit.holding.begin(), circuit.holding.end(), [&](int a, int b) { return distance[a] < distance[b]; });
  for (int u : circuit.holding) {
    CircuitUnit& unit = circuit.units[u];
    unit.first_state = circuit.states;
    unit.states = circuit.context->layout.size() + static_cast<int>(unit.operation->traits().state_names.size());
    circuit.states += unit.states;
    unit.first_ledger = circuit.ledgers;
    for (const std::string& component : unit.operation->traits().ledger) {
      circuit.ledger_component.push_back(circuit.chemistry->find_component(component));
      circuit.ledger_unit.push_back(u);
      ++circuit.ledgers;
    }
  }
}

}  // namespace

void order_circuit(Circuit& circuit, bool steady, const std::vector<UnitSpec>& specs, Diagnostics& diagnostics) {
  for (;;) {
    std::vector<int> state(circuit.units.size(), 0), passing, path;
    int torn = -1;
    std::function<void(int)> visit = [&](int u) {
      if (torn >= 0 || circuit.units[u].operation->traits().hold_up || state[u] == 2) return;
      if (state[u] == 1) {
        torn = u;
        return;
      }
      state[u] = 1;
      path.push_back(u);
      for (int s : circuit.units[u].takes)
        if (circuit.streams[s].source >= 0) visit(circuit.streams[s].source);
      if (torn >= 0) return;
      path.pop_back();
      state[u] = 2;
      passing.push_back(u);
    };
    for (std::size_t u = 0; u < circuit.units.size(); ++u) visit(static_cast<int>(u));
    if (torn < 0) {
      circuit.passing = passing;
      break;
    }
    std::string loop;
    for (auto at = std::find(path.begin(), path.end(), torn); at != path.end(); ++at) loop = circuit.units[*at].name + (loop.empty() ? "" : " > ") + loop;
    if (!steady) {
      diagnostics.fault(Code::no_hold_up, specs[torn].place,
                         "the loop " + loop + " has no vessel with hold-up: through time put a tank or a surge into it");
      return;
    }
    tear(circuit, torn);
  }
  place_holding(circuit);
}

}  // namespace leat
