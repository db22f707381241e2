// An edge list with string ids as a .tsv, and the counts that a reader finds after cleaning (direction ignored, repeated links
// merged, loops dropped). Invariant: a file is written only where these are the counts the network is known by.

import { writeFileSync } from 'node:fs'

export class EdgeList {
  #numbers = new Map()
  #links = new Set()
  #lines = []
  #loops = 0

  add(source, target) {
    const [u, v] = [this.#number(source), this.#number(target)].sort((a, b) => a - b)
    if (u === v) this.#loops++
    else this.#links.add(u * 2 ** 20 + v)
    this.#lines.push(`${source}\t${target}\n`)
  }

  write(path, { nodes, links }) {
    const found = `${this.#numbers.size} nodes, ${this.#links.size} links; ${this.#lines.length} rows, ${this.#loops} loops`
    if (this.#numbers.size !== nodes || this.#links.size !== links)
      throw new Error(`${nodes} nodes and ${links} links were expected; found ${found}`)
    writeFileSync(path, this.#lines.join(''))
    console.log(`${path}: ${found}`)
  }

  #number(label) {
    let number = this.#numbers.get(label)
    if (number === undefined) {
      // Neither network needs quotes in a .tsv; one that does would have to be written another way.
      if (/["\t]|^[#%]|^\s|\s$/.test(label)) throw new Error(`the label '${label}' would need quotes`)
      this.#numbers.set(label, (number = this.#numbers.size))
    }
    return number
  }
}
