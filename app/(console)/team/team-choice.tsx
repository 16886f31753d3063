import Link from 'next/link'
import { currentUser } from '@/lib/http'

/** For people in several teams: links to the same page of each. */
export async function TeamChoice({ path, chosen }: { path: string; chosen: string }) {
  const user = await currentUser()
  if (!user || user.teams.length < 2) return null
  return (
    <nav aria-label="Teams" className="mb-5">
      <ul className="flex flex-wrap gap-x-5 gap-y-1">
        {user.teams.map(({ slug, name }) => (
          <li key={slug}>
            <Link
              href={`${path}?team=${slug}`}
              aria-current={slug === chosen ? 'page' : undefined}
              className={slug === chosen ? 'font-semibold' : 'text-soft'}
            >
              {name}
            </Link>
          </li>
        ))}
      </ul>
    </nav>
  )
}
