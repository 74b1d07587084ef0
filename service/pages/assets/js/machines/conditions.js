// Rules between the fields of one part, as the schema says them: if this field is such, then those must be so.
const fits = (said, value) => {
  if ("const" in said) return value === said.const;
  if (said.enum) return said.enum.includes(value);
  if (said.not) return !fits(said.not, value);
  if (said.type === "null") return value === null;
  return said.type !== "object" || (value !== null && typeof value === "object" && holds(said, value));
};

function holds(condition, value) {
  if (condition.not) return !holds(condition.not, value);
  const isThere = (name) => value[name] !== undefined;
  if (!(condition.required ?? []).every(isThere)) return false;
  return Object.entries(condition.properties ?? {}).every(([name, said]) => !isThere(name) || fits(said, value[name]));
}

// What the rules of a part ask of a value of it: { needed: names, apart: names of what must be left out, fixed: pairs }.
export function askedOf(schema, value) {
  const asked = { needed: [], apart: [], fixed: [] };
  for (const rule of schema.allOf ?? []) {
    const branch = (holds(rule.if, value) ? rule.then : rule.else) ?? {};
    asked.needed.push(...(branch.required ?? []).filter((name) => value[name] === undefined || value[name] === null));
    for (const [name, said] of Object.entries(branch.properties ?? {})) {
      const now = value[name];
      if (now === undefined || now === null) continue;
      if (said.const === null || (said.maxItems === 0 && now.length > 0)) asked.apart.push(name);
      else if ("const" in said && now !== said.const) asked.fixed.push([name, said.const]);
    }
  }
  return asked;
}
