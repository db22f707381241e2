// Turns a Metamath database into an edge list: a theorem - an assertion (axiom, definition, theorem) that its proof cites.
// Rule: hypotheses ($f, $e) are no nodes. Assertions that neither cite nor are cited have no link, and so no line.

import { readFileSync } from 'node:fs'
import { EdgeList } from './edge-list.mjs'

const [database, out] = process.argv.slice(2)
const words = readFileSync(database, 'utf8').replace(/\$\([^]*?\$\)/g, ' ').split(/\s+/)
const assertions = new Set()
const list = new EdgeList()
for (let i = 0; i < words.length; i++) {
  if (words[i] === '$a') assertions.add(words[i - 1])
  if (words[i] !== '$p') continue
  const label = words[i - 1]
  assertions.add(label)
  // A compressed proof: $= ( the labels it cites ) letters $.
  i = words.indexOf('$=', i) + 1
  if (words[i] !== '(') throw new Error(`${label}: its proof is not compressed`)
  for (i++; words[i] !== ')'; i++) {
    // What is cited stands earlier in the file; a label that is no assertion is a hypothesis.
    if (assertions.has(words[i])) list.add(label, words[i])
  }
}
list.write(out, { nodes: 40201, links: 1213085 })
console.log(`${assertions.size} assertions, linked or not`)
