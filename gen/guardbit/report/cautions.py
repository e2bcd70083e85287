"""The cautions that help texts, certificates and documentation repeat word for word."""

CAUTIONS: tuple[str, ...] = (
    "This is engineering evidence, not a qualified tool.",
    "For safety-related products, tool confidence and verification duties (ISO 26262-8 clause 11,"
    " IEC 61508-3, DO-330, IEC 62304 and the like) stay with the licensed or responsible engineer"
    " and local rules.",
    "The bounds hold only for inputs inside the declared range.",
    "One tool that both generates and checks can share a cause of failure.",
)
