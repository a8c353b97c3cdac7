// Runs axe-core in Chromium over pages that beadwell wrote, light and dark, at the width of a desk and of a phone.
// Not part of .ci/run, for it needs a browser and two packages of npm. In a folder outside of the repository:
//
//   npm install axe-core@4 puppeteer-core@24
//
// and in the repository, with the folder in PACKAGES:
//
//   NODE_PATH=$PACKAGES/node_modules CHROMIUM=$(command -v chromium) node .ci/accessibility.mjs results/*/report.html
//
// Prints a line for each page and view. Exit status 1 when there is a violation, or a page is wider than its window.
import { createRequire } from 'node:module'
import fs from 'node:fs'
import path from 'node:path'

const require = createRequire(path.join(process.env.NODE_PATH ?? '.', 'any.js'))
const puppeteer = require('puppeteer-core')
const axe = fs.readFileSync(require.resolve('axe-core/axe.min.js'), 'utf8')
const browser = await puppeteer.launch({ executablePath: process.env.CHROMIUM, args: ['--no-sandbox'] })
let bad = 0
for (const file of process.argv.slice(2)) {
  for (const scheme of ['light', 'dark']) {
    for (const width of [1200, 360]) {
      const page = await browser.newPage()
      await page.setBypassCSP(true) // axe-core is a script; the pages allow none
      await page.emulateMediaFeatures([{ name: 'prefers-color-scheme', value: scheme }])
      await page.setViewport({ width, height: 800 })
      await page.goto('file://' + path.resolve(file))
      await page.evaluate(axe)
      const { violations } = await page.evaluate(() => axe.run(document))
      const over = await page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth)
      bad += violations.length + (over > 0 ? 1 : 0)
      console.log(`${file}, ${scheme}, ${width} px: ${violations.length} violations, ${over} px too wide`)
      for (const v of violations) console.log(`  ${v.id}: ${v.help}\n    ${v.nodes.map((n) => n.html).join('\n    ')}`)
      await page.close()
    }
  }
}
await browser.close()
process.exit(bad ? 1 : 0)
