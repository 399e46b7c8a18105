"""The name of a rail: the name its consumers know it by."""

from __future__ import annotations

from analyzer.circuit import Circuit, natural_key
from analyzer.rails.ground import is_ground_pin
from analyzer.rails.kinds import Kind
from analyzer.rails.names import named_volts
from analyzer.rails.network import Mesh


def rail_name(mesh: Mesh, group: str) -> str:
    """Name of the net that most consumers hang on, user-given names first."""
    nets = mesh.members.get(group, (group,))
    if len(nets) == 1:
        return nets[0]
    best = nets[0]
    best_score: tuple[bool, int, bool, bool, int] | None = None
    for net in sorted(nets, key=natural_key):
        score = _score(mesh.circuit, mesh, net)
        if best_score is None or score > best_score:
            best, best_score = net, score
    return best


def _score(circuit: Circuit, mesh: Mesh, net: str) -> tuple[bool, int, bool, bool, int]:
    entry = circuit.net_by_name[net]
    consumers = {
        component.key for component, pin in circuit.on_net[net] if _consumes(mesh, component.key, pin.kind, pin.name)
    }
    return (entry.is_named, len(consumers), named_volts(net) is not None, not net.startswith("/"), len(entry.pins))


def _consumes(mesh: Mesh, key: str, kind: str, name: str) -> bool:
    return kind == "power_in" or is_ground_pin(name) or mesh.joined.kinds[key] in (Kind.CONNECTOR, Kind.LED)
