"""The tables of the README as the declarations say them."""

from models.mixing import MIXING_MODELS
from models.quantity import QUANTITIES


def vocabulary():
    """Every quantity with symbol, unit and meaning."""
    head = ["| name | symbol | unit | meaning |", "|---|---|---|---|"]
    rows = [
        f"| `{q.name}` | {q.symbol} | {q.unit} | {q.meaning} |".replace("|  |", "| |")
        for q in QUANTITIES.values()
    ]
    return "\n".join(head + [row.replace("|  |", "| |") for row in rows])


def mixing_models():
    """Every mixing model with what it takes and how far its own equation may be off."""
    head = ["| name | takes | soil properties it needs | own u, m3/m3 |", "|---|---|---|---|"]
    rows = []
    for model in MIXING_MODELS.values():
        needs = [
            p.name
            for p in model.parameters
            if p.default is None and not p.supplied and not p.optional and p.name != "frequency"
        ]
        u = model.discrepancy.standard_uncertainty
        rows.append(
            f"| `{model.key}` | {model.permittivity} permittivity | {', '.join(needs) or '-'} "
            f"| {u:g} |"
        )
    return "\n".join(head + rows)
