/** ISO 3166-1 alpha-2 codes of countries that parcels can be sent to. */
const CODES = ('AD AE AL AM AR AT AU AZ BA BB BD BE BG BH BM BO BR BS BW BZ CA CH CL CN CO CR CV CY CZ DE DK DO DZ EC EE EG ES FI FJ FR GB GE GH GI GR GT HK HN HR HU ID IE IL IN IS IT JM JO JP '
  + 'KE KH KR KW KZ LA LI LK LT LU LV MA MC MD ME MG MK MN MO MT MU MV MX MY MZ NA NG NI NL NO NP NZ OM PA PE PG PH PK PL PR PT PY QA RO RS RW SA SC SE SG SI SK SM SN SV TH TN TR TT TW TZ UA UG US UY UZ VN XK ZA ZM').split(' ')

/** Names in the browser's own list, in alphabetical order. */
export function countryOptions(): { value: string, label: string }[] {
  const names = new Intl.DisplayNames('en', { type: 'region' })
  return CODES.map(value => ({ value, label: names.of(value) ?? value })).sort((a, b) => a.label.localeCompare(b.label, 'en'))
}

export function countryName(code: string): string {
  return new Intl.DisplayNames('en', { type: 'region' }).of(code) ?? code
}
